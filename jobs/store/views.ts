import type { ReducedScan } from '../../schema/wire/reduced.ts';
import type { Ports } from '../ports/index.ts';
import type { ResultRow } from './tables/index.ts';

export interface ScanView {
  id: string;
  campaignId: string;
  /** Rows of scans.csv of this scan, one an event. */
  rows: ResultRow[];
  /** Blob of the original file and its size, bytes. */
  originalKey: string;
  bytes: number;
  reducedKey: string | null;
}

/** One scan within a lab, or undefined. */
export async function findScan(_ports: Ports, _scanId: string, _lab?: string): Promise<ScanView | undefined> {
  throw new Error('not written yet');
}

/** The reduced curves of a scan, or undefined when it has none. */
export async function readReducedScan(_ports: Ports, _scanId: string): Promise<ReducedScan | undefined> {
  throw new Error('not written yet');
}

export interface SampleView {
  id: string;
  campaignId: string;
  sample: string;
  state: string;
  reason: string | null;
}

/** One sample within a lab, or undefined. */
export async function findSample(_ports: Ports, _sampleId: string, _lab?: string): Promise<SampleView | undefined> {
  throw new Error('not written yet');
}

export async function listSamples(_ports: Ports, _campaignId: string): Promise<SampleView[]> {
  throw new Error('not written yet');
}

/** Answers when database and blob store can be reached, else throws what stopped them. */
export async function checkStores(_ports: Ports): Promise<void> {
  throw new Error('not written yet');
}
