import type { CoverageRow, GapRow } from '../../schema/wire/campaign.ts';
import type { CurveKind } from '../../schema/wire/curve-kinds.ts';
import type { AdviceRow, ForecastRow } from '../../schema/wire/forecasts.ts';
import type { ParameterRow } from '../../schema/wire/parameters.ts';
import type { ResultTable } from '../../schema/wire/result-tables.ts';
import type { VerdictRow } from '../../schema/wire/verdicts.ts';
import type { Curves } from '../model/curves.ts';
import { request, requestAll } from './request.ts';
import type { Campaign, FileOutcome, FlagRow, InstrumentRow, JobRow, SampleView, ScanRow, Status } from './rows.ts';
import { copyText, saveFile } from './save.ts';
import { tabsFromCsv } from './tabs.ts';

/** Rows of each table as the API lists them. */
export interface TableRows {
  scans: ScanRow;
  coverage: CoverageRow;
  gaps: GapRow;
  flags: FlagRow;
  parameters: ParameterRow;
  instruments: InstrumentRow;
  verdicts: VerdictRow;
  forecasts: ForecastRow;
  advice: AdviceRow;
}

const withJson = (method: string, body: unknown): RequestInit => ({
  method,
  headers: { 'content-type': 'application/json' },
  body: JSON.stringify(body),
});

const route = (id: string): string => `/campaigns/${encodeURIComponent(id)}`;

export const listCampaigns = (signal?: AbortSignal): Promise<Campaign[]> =>
  requestAll<Campaign>('/campaigns', {}, signal);

export const loadCampaign = async (id: string, signal?: AbortSignal): Promise<Campaign> =>
  (await request(route(id), { signal })).json();

export const loadStatus = async (id: string, signal?: AbortSignal): Promise<Status> =>
  (await request(`${route(id)}/status`, { signal })).json();

export interface TableFilter {
  sample?: string;
  quantity?: string;
  method?: string;
}

export const loadTable = <Table extends keyof TableRows>(
  id: string,
  table: Table,
  filter: Pick<TableFilter, 'sample'> = {},
  signal?: AbortSignal,
): Promise<TableRows[Table][]> => requestAll<TableRows[Table]>(`${route(id)}/${table}`, { ...filter }, signal);

export const loadParameters = (id: string, filter: TableFilter, signal?: AbortSignal): Promise<ParameterRow[]> =>
  requestAll<ParameterRow>(`${route(id)}/parameters`, { ...filter }, signal);

const sampleRoute = (sampleId: string): string => `/samples/${encodeURIComponent(sampleId)}`;

export const loadSample = async (sampleId: string, signal?: AbortSignal): Promise<SampleView> =>
  (await request(sampleRoute(sampleId), { signal })).json();

export const loadCurves = async (sampleId: string, kind: CurveKind, signal?: AbortSignal): Promise<Curves> =>
  (await request(`${sampleRoute(sampleId)}/curves?kind=${kind}`, { signal })).json();

/** What is asked: exactly the forms that POST /samples/:id/forecasts takes. */
export interface ForecastBody {
  temperature_C?: number;
  conversion?: number;
  time_s?: number;
  program?: [number, number][];
}

export const askForecast = async (sampleId: string, body: ForecastBody): Promise<ForecastRow[]> =>
  (await (await request(`${sampleRoute(sampleId)}/forecasts`, withJson('POST', body))).json()).items;

export const loadJobs = (id: string, state: JobRow['state'], signal?: AbortSignal): Promise<JobRow[]> =>
  requestAll<JobRow>('/jobs', { campaign: id, state }, signal);

export const retryJob = async (jobId: string): Promise<JobRow> =>
  (await request(`/jobs/${encodeURIComponent(jobId)}/retry`, { method: 'POST' })).json();

export const openStatusStream = (id: string, lastEventId: string | undefined, signal: AbortSignal): Promise<Response> =>
  request(`${route(id)}/stream`, {
    signal,
    headers: { accept: 'text/event-stream', ...(lastEventId ? { 'last-event-id': lastEventId } : {}) },
    cache: 'no-store',
  });

export const createCampaign = async (name: string): Promise<Campaign> =>
  (await request('/campaigns', withJson('POST', { name }))).json();

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

/** The report, one page of HTML that stands by itself. */
export async function downloadReport(campaign: Campaign): Promise<void> {
  const response = await request(`${route(campaign.id)}/report`);
  saveFile(await response.blob(), [campaign.name, 'report'], 'html');
}

/** Every table and the report in one archive. */
export async function downloadResults(campaign: Campaign): Promise<void> {
  const response = await request(`${route(campaign.id)}/results.zip`);
  saveFile(await response.blob(), [campaign.name, 'results'], 'zip');
}

const loadCsv = async (id: string, table: ResultTable, filter: Pick<TableFilter, 'sample'>): Promise<string> =>
  (await request(`${route(id)}/${table}?${new URLSearchParams({ format: 'csv', ...filter })}`)).text();

/** A whole table, or a sample's part of it, saved as CSV. */
export async function downloadTable(
  campaign: Campaign,
  table: ResultTable,
  filter: Pick<TableFilter, 'sample'> = {},
): Promise<void> {
  const text = await loadCsv(campaign.id, table, filter);
  saveFile(new Blob([text], { type: 'text/csv' }), [campaign.name, filter.sample, table], 'csv');
}

/** The same to the clipboard, cells parted by tabs as spreadsheets take them. */
export async function copyTable(
  campaign: Campaign,
  table: ResultTable,
  filter: Pick<TableFilter, 'sample'> = {},
): Promise<void> {
  await copyText(loadCsv(campaign.id, table, filter).then(tabsFromCsv));
}
