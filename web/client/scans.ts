import { request } from './request.ts';
import type { ScanRow } from './rows.ts';

/** Fields that a person may set over the sheet; null takes a correction back. */
export interface ScanCorrections {
  exotherm?: 'up' | 'down' | null;
  mass_mg?: number | null;
  limits_K?: [number, number] | null;
  /** Why the scan stays out */
  excluded?: string | null;
}

export interface ScanView {
  id: string;
  rows: ScanRow[];
  /** What stands over the sheet now */
  corrections: ScanCorrections;
}

export interface HistoryEntry {
  field: string;
  before: string | number | number[] | null;
  after: string | number | number[] | null;
  cause: 'correction' | 'sheet';
  at: string;
}

const route = (scanId: string): string => `/scans/${encodeURIComponent(scanId)}`;

export const loadScan = async (scanId: string, signal?: AbortSignal): Promise<ScanView> =>
  (await request(route(scanId), { signal })).json();

export const loadHistory = async (scanId: string, signal?: AbortSignal): Promise<HistoryEntry[]> =>
  (await (await request(`${route(scanId)}/history`, { signal })).json()).items;

export const correctScan = async (scanId: string, corrections: ScanCorrections): Promise<ScanView> =>
  (
    await request(route(scanId), {
      method: 'PATCH',
      headers: { 'content-type': 'application/json' },
      body: JSON.stringify(corrections),
    })
  ).json();

/** The file as it came. */
export const loadOriginal = async (scanId: string): Promise<Blob> =>
  (await request(`${route(scanId)}/original`)).blob();
