import type { CampaignStatus, CoverageRow, GapRow } from '../../schema/wire/campaign.ts';
import type { ParameterRow } from '../../schema/wire/parameters.ts';
import type { ResultTable } from '../../schema/wire/result-tables.ts';
import { request, requestAll } from './request.ts';
import type { Campaign, FileOutcome, FlagRow, InstrumentRow, ScanRow } from './rows.ts';

/** Rows of each table as the API lists them. */
export interface TableRows {
  scans: ScanRow;
  coverage: CoverageRow;
  gaps: GapRow;
  flags: FlagRow;
  parameters: ParameterRow;
  instruments: InstrumentRow;
}

const route = (id: string): string => `/campaigns/${encodeURIComponent(id)}`;

export const listCampaigns = (signal?: AbortSignal): Promise<Campaign[]> => requestAll<Campaign>('/campaigns', signal);

export const loadCampaign = async (id: string, signal?: AbortSignal): Promise<Campaign> =>
  (await request(route(id), { signal })).json();

export const loadStatus = async (id: string, signal?: AbortSignal): Promise<CampaignStatus> =>
  (await request(`${route(id)}/status`, { signal })).json();

export const loadTable = <Table extends keyof TableRows>(
  id: string,
  table: Table,
  signal?: AbortSignal,
): Promise<TableRows[Table][]> => requestAll<TableRows[Table]>(`${route(id)}/${table}`, signal);

export const openStatusStream = (id: string, lastEventId: string | undefined, signal: AbortSignal): Promise<Response> =>
  request(`${route(id)}/stream`, {
    signal,
    headers: { accept: 'text/event-stream', ...(lastEventId ? { 'last-event-id': lastEventId } : {}) },
    cache: 'no-store',
  });

export const createCampaign = async (name: string): Promise<Campaign> =>
  (
    await request('/campaigns', {
      method: 'POST',
      headers: { 'content-type': 'application/json' },
      body: JSON.stringify({ name }),
    })
  ).json();

/** Sends one file as a raw body under its path in the campaign. */
export const sendFile = async (id: string, path: string, file: File, signal?: AbortSignal): Promise<FileOutcome> =>
  (
    await request(`${route(id)}/files?path=${encodeURIComponent(path)}`, {
      method: 'PUT',
      body: file,
      headers: { 'content-type': 'application/octet-stream' },
      signal,
    })
  ).json();

/** A whole table as CSV, saved under `name-table.csv`. */
export async function downloadTable(campaign: Campaign, table: ResultTable): Promise<void> {
  const response = await request(`${route(campaign.id)}/${table}?format=csv`);
  const url = URL.createObjectURL(await response.blob());
  const link = document.createElement('a');
  link.href = url;
  link.download = `${campaign.name.replace(/[^\p{L}\p{N}]+/gu, '-')}-${table}.csv`;
  link.click();
  setTimeout(() => URL.revokeObjectURL(url), 10_000);
}
