import type { SampleState, ScanState } from './states.ts';

/** One sample scan as coverage sees it (settled, reduced or not). */
export interface CoverageScan {
  sample: string;
  instrument: string;
  /** Measured where reduced, else nominal. */
  rateKPerS: number;
  replicate?: string;
}

export interface CoverageRow {
  sample: string;
  decade_low_K_per_s: number;
  decade_high_K_per_s: number;
  instrument: string;
  scan_count: number;
  /** Distinct rates, K/s, ascending */
  rates: number[];
}

export interface GapRow {
  sample: string;
  code: string;
  detail: string;
  action: string;
}

/** Body of GET /campaigns/:id/status and of the event stream. */
export interface CampaignStatus {
  settled: boolean;
  scans: Record<ScanState, number>;
  samples: { sample: string; state: SampleState; reason?: string; verdict?: string }[];
  jobs: { queued: number; running: number; failed: number; oldest_age_s: number | null };
  eta_s: number | null;
}
