// Written by `npm run client-types` from the OpenAPI document, and held to it by test/docs.

export interface Campaign {
  id: string;
  name: string;
  created_at: string;
  /** Only where one campaign is asked for. */
  instruments?: { id: string; instrument: string }[];
  /** Grows with every change of anything that the campaign shows. */
  revision: number;
}

export interface Problem {
  type: string;
  title: string;
  status: number;
  detail: string;
  action: string;
  field?: string;
  file?: string;
  line?: number;
}

/** A question of the campaign, as a row of goal.csv: what it leaves out is what is asked for. A conversion alone is asked of every programme. */
export interface Goal {
  sample: string;
  conversion?: number;
  temperature_C?: number;
  time_s?: number;
}

export interface ReceivedFile {
  file: string;
  outcome: 'accepted' | 'known' | 'replaced' | 'sheet' | 'archive' | 'refused';
  scan_ids?: string[];
  job_id?: string;
  reason?: string;
  /** The other name of one path (`x.txt` and `x.txt.gz`) under which it came before: unless the bytes are the same, that no longer counts. */
  replaces?: string;
}

export interface CampaignStatus {
  settled: boolean;
  scans: {
    received: number;
    read: number;
    reduced: number;
    set_aside: number;
    failed: number;
    unassigned: number;
    excluded: number;
    superseded: number;
  };
  samples: {
    id: string;
    sample: string;
    state: 'waiting' | 'queued' | 'fitting' | 'fitted' | 'insufficient' | 'failed' | 'stale';
    reason?: string;
    verdict?: string;
  }[];
  jobs: { queued: number; running: number; failed: number; oldest_age_s: number | null };
  eta_s: number | null;
}

export interface Overview {
  campaign: Campaign;
  status: CampaignStatus;
  /** Names this state to `…/stream` as its Last-Event-ID. */
  state: string;
  tables: {
    parameters?: {
      sample: string;
      event: number;
      quantity: string;
      method: string;
      conversion: number | null;
      temperature_K: number | null;
      value: number;
      unit: string;
      lower95: number | null;
      upper95: number | null;
      scan_count: number;
      rate_min_K_per_s: number;
      rate_max_K_per_s: number;
      flags: string[];
      interval: 'monte_carlo' | 'student_t' | 'f_ratio';
      variant: '' | 'peak' | 'without_outliers' | 'full_response';
    }[];
    scans?: {
      file: string;
      sha256: string;
      sample: string | null;
      instrument: string | null;
      role: 'sample' | 'standard' | 'blank' | null;
      event: number | null;
      status: 'received' | 'read' | 'reduced' | 'set_aside' | 'failed' | 'unassigned' | 'excluded' | 'superseded';
      reason: string | null;
      rate_nominal_K_per_s: number | null;
      rate_K_per_s: number | null;
      mass_mg: number | null;
      glass_transition_K: number | null;
      onset_K: number | null;
      peak_K: number | null;
      end_K: number | null;
      width_K: number | null;
      enthalpy_J_per_g: number | null;
      flags: string[];
      segment: number | null;
      replicate: string | null;
      centroid_K: number | null;
    }[];
    instruments?: {
      instrument: string;
      kind: 'furnace' | 'chip';
      offset_K: number;
      offset_se_K: number;
      lag_s: number;
      lag_se_s: number;
      heat_factor: number | null;
      heat_factor_se: number | null;
      standards: number;
      source: 'standards' | 'sheet' | 'prior';
      offset_slope: number | null;
      response_time_s: number | null;
    }[];
    verdicts?: {
      sample: string;
      event: number;
      verdict: 'straight' | 'instrument' | 'material' | 'undecided';
      bend: number | null;
      bend_lower99: number | null;
      bend_upper99: number | null;
      p_value: number | null;
      delta_aicc: number | null;
      energy_low_rate_kJ_per_mol: number | null;
      energy_high_rate_kJ_per_mol: number | null;
      instruments: string[];
      rate_min_K_per_s: number;
      rate_max_K_per_s: number;
      decides_next: string;
    }[];
    advice?: {
      sample: string;
      rank: number;
      instrument: string;
      rate_K_per_s: number;
      goal: 'energy' | 'bend' | 'forecast';
      interval_now: number;
      interval_expected: number;
      event: number;
      unit: '1' | 'kJ/mol' | 'decades';
      scans_to_half: number | null;
      sentence: string;
      caution: string;
    }[];
    coverage?: {
      sample: string;
      decade_low_K_per_s: number;
      decade_high_K_per_s: number;
      instrument: string;
      scan_count: number;
      rates: number[];
    }[];
    gaps?: { sample: string; code: string; detail: string; action: string }[];
    flags?: {
      severity: 'note' | 'warn' | 'stop';
      code: string;
      sample: string | null;
      instrument: string | null;
      file: string | null;
      event: number | null;
      detail: string;
      action: string;
    }[];
  };
  is_whole: boolean;
  scans?: {
    id: string;
    file: string;
    instrument: string;
    status: 'received' | 'read' | 'reduced' | 'set_aside' | 'failed' | 'unassigned' | 'excluded' | 'superseded';
  }[];
  outlines?: Curves[];
}

export interface Curves {
  kind:
    | 'thermogram'
    | 'baseline'
    | 'conversion'
    | 'kissinger'
    | 'energy'
    | 'local_energy'
    | 'growth'
    | 'viscosity'
    | 'ttt'
    | 'constant_heating';
  x: { quantity: string; unit: string };
  y: { quantity: string; unit: string };
  series: {
    name: string;
    instrument?: string;
    scan_id?: string;
    x: number[];
    y: number[];
    lower?: number[];
    upper?: number[];
    unit?: string;
    time_s?: number[];
    beyond_measured_K?: number[];
  }[];
  caution?: string;
}

export interface ParametersRow {
  sample: string;
  event: number;
  quantity: string;
  method: string;
  conversion: number | null;
  temperature_K: number | null;
  value: number;
  unit: string;
  lower95: number | null;
  upper95: number | null;
  scan_count: number;
  rate_min_K_per_s: number;
  rate_max_K_per_s: number;
  flags: string[];
  interval: 'monte_carlo' | 'student_t' | 'f_ratio';
  variant: '' | 'peak' | 'without_outliers' | 'full_response';
}

export interface ScansRow {
  file: string;
  sha256: string;
  sample: string | null;
  instrument: string | null;
  role: 'sample' | 'standard' | 'blank' | null;
  event: number | null;
  status: 'received' | 'read' | 'reduced' | 'set_aside' | 'failed' | 'unassigned' | 'excluded' | 'superseded';
  reason: string | null;
  rate_nominal_K_per_s: number | null;
  rate_K_per_s: number | null;
  mass_mg: number | null;
  glass_transition_K: number | null;
  onset_K: number | null;
  peak_K: number | null;
  end_K: number | null;
  width_K: number | null;
  enthalpy_J_per_g: number | null;
  flags: string[];
  segment: number | null;
  replicate: string | null;
  centroid_K: number | null;
}

export interface ConversionRow {
  file: string;
  segment: number;
  sample: string;
  instrument: string;
  event: number;
  conversion: number;
  time_s: number;
  temperature_K: number;
  rate_per_s: number;
}

export interface VerdictsRow {
  sample: string;
  event: number;
  verdict: 'straight' | 'instrument' | 'material' | 'undecided';
  bend: number | null;
  bend_lower99: number | null;
  bend_upper99: number | null;
  p_value: number | null;
  delta_aicc: number | null;
  energy_low_rate_kJ_per_mol: number | null;
  energy_high_rate_kJ_per_mol: number | null;
  instruments: string[];
  rate_min_K_per_s: number;
  rate_max_K_per_s: number;
  decides_next: string;
}

export interface InstrumentsRow {
  instrument: string;
  kind: 'furnace' | 'chip';
  offset_K: number;
  offset_se_K: number;
  lag_s: number;
  lag_se_s: number;
  heat_factor: number | null;
  heat_factor_se: number | null;
  standards: number;
  source: 'standards' | 'sheet' | 'prior';
  offset_slope: number | null;
  response_time_s: number | null;
}

export interface CoverageRow {
  sample: string;
  decade_low_K_per_s: number;
  decade_high_K_per_s: number;
  instrument: string;
  scan_count: number;
  rates: number[];
}

export interface GapsRow {
  sample: string;
  code: string;
  detail: string;
  action: string;
}

export interface ForecastsRow {
  sample: string;
  event: number;
  method: 'model_free' | 'shared_law';
  conversion: number | null;
  temperature_C: number | null;
  program: string;
  value: number | null;
  unit: '1' | 's' | '°C';
  lower95: number | null;
  upper95: number | null;
  beyond_measured_K: number;
  flags: string[];
  question: 'time_to_conversion' | 'conversion_at_end' | 'temperature_limit';
  time_s: number | null;
  goal: 'met' | 'not_met' | 'cannot_say' | '';
  beyond_measured_decades: number;
  detail: string;
  caution: string;
}

export interface AdviceRow {
  sample: string;
  rank: number;
  instrument: string;
  rate_K_per_s: number;
  goal: 'energy' | 'bend' | 'forecast';
  interval_now: number;
  interval_expected: number;
  event: number;
  unit: '1' | 'kJ/mol' | 'decades';
  scans_to_half: number | null;
  sentence: string;
  caution: string;
}

export interface FlagsRow {
  severity: 'note' | 'warn' | 'stop';
  code: string;
  sample: string | null;
  instrument: string | null;
  file: string | null;
  event: number | null;
  detail: string;
  action: string;
}

export interface ForecastAnswer {
  /** One row an event and method. */
  items: {
    sample: string;
    event: number;
    method: 'model_free' | 'shared_law';
    conversion: number | null;
    temperature_C: number | null;
    program: string;
    value: number | null;
    unit: '1' | 's' | '°C';
    lower95: number | null;
    upper95: number | null;
    beyond_measured_K: number;
    flags: string[];
    question: 'time_to_conversion' | 'conversion_at_end' | 'temperature_limit';
    time_s: number | null;
    goal: 'met' | 'not_met' | 'cannot_say' | '';
    beyond_measured_decades: number;
    detail: string;
    caution: string;
  }[];
  /** Stands on every forecast. */
  caution: string;
}

/** Exactly one of {temperature_C, conversion}, {temperature_C, time_s}, {program, conversion}, {program}, {time_s, conversion}. */
export interface ForecastQuestion {
  conversion?: number;
  temperature_C?: number;
  time_s?: number;
  program?: [number, number][];
}

export interface Sample {
  id: string;
  campaign_id: string;
  sample: string;
  state: 'waiting' | 'queued' | 'fitting' | 'fitted' | 'insufficient' | 'failed' | 'stale';
  reason: string | null;
  scans: {
    id: string;
    file: string;
    instrument: string;
    status: 'received' | 'read' | 'reduced' | 'set_aside' | 'failed' | 'unassigned' | 'excluded' | 'superseded';
  }[];
}

export interface Scan {
  id: string;
  campaign_id: string;
  /** Size of the original file. */
  bytes: number;
  /** The rows of the scans table, one an event. */
  rows: {
    file: string;
    sha256: string;
    sample: string | null;
    instrument: string | null;
    role: 'sample' | 'standard' | 'blank' | null;
    event: number | null;
    status: 'received' | 'read' | 'reduced' | 'set_aside' | 'failed' | 'unassigned' | 'excluded' | 'superseded';
    reason: string | null;
    rate_nominal_K_per_s: number | null;
    rate_K_per_s: number | null;
    mass_mg: number | null;
    glass_transition_K: number | null;
    onset_K: number | null;
    peak_K: number | null;
    end_K: number | null;
    width_K: number | null;
    enthalpy_J_per_g: number | null;
    flags: string[];
    segment: number | null;
    replicate: string | null;
    centroid_K: number | null;
  }[];
  /** Fields that were corrected by hand, with the value that counts. */
  corrections: Record<string, string | number | number[] | null>;
}

export interface ScanCorrections {
  sample?: string | null;
  instrument?: string | null;
  role?: 'sample' | 'standard' | 'blank' | null;
  rate_nominal_K_per_s?: number | null;
  mass_mg?: number | null;
  exotherm?: 'up' | 'down' | null;
  replicate?: string | null;
  segment?: number | null;
  reference?: string | null;
  note?: string | null;
  /** Where the baseline of the event is tied, K. */
  limits_K?: [number, number] | [number, number];
  /** Why the scan stays out. */
  excluded?: string | null;
}

export interface ScanHistoryEntry {
  field: string;
  before: string | number | number[] | null;
  after: string | number | number[] | null;
  /** `sheet`: a later sheet changed the cell, so that the correction no longer counts. */
  cause: 'correction' | 'sheet';
  at: string;
}

export interface Instrument {
  id: string;
  campaign_id: string;
  instrument: string;
  /** Its row of the instruments table, once calibrated. */
  row:
    | {
        instrument: string;
        kind: 'furnace' | 'chip';
        offset_K: number;
        offset_se_K: number;
        lag_s: number;
        lag_se_s: number;
        heat_factor: number | null;
        heat_factor_se: number | null;
        standards: number;
        source: 'standards' | 'sheet' | 'prior';
        offset_slope: number | null;
        response_time_s: number | null;
      }
    | {
        instrument: string;
        kind: 'furnace' | 'chip';
        offset_K: number;
        offset_se_K: number;
        lag_s: number;
        lag_se_s: number;
        heat_factor: number | null;
        heat_factor_se: number | null;
        standards: number;
        source: 'standards' | 'sheet' | 'prior';
        offset_slope: number | null;
        response_time_s: number | null;
      };
}

export interface CalibrationCurves {
  kind: 'calibration';
  x: { quantity: string; unit: string };
  y: { quantity: string; unit: string };
  series: {
    name: string;
    instrument?: string;
    scan_id?: string;
    x: number[];
    y: number[];
    lower?: number[];
    upper?: number[];
    unit?: string;
    time_s?: number[];
    beyond_measured_K?: number[];
  }[];
}

export interface Job {
  id: string;
  campaign_id: string;
  step: string;
  /** Id of the file, scan, sample or campaign that the step works on. */
  subject: string;
  state: 'queued' | 'running' | 'done' | 'failed';
  attempts: number;
  last_error: string | null;
  next_try_at: string;
  created_at: string;
  started_at: string | null;
  finished_at: string | null;
}

/** Every operation by its name: the id in its path, its query, its body and its answer. */
export interface Operations {
  /** Make a campaign. A name that is taken is refused with 409. */
  createCampaign: { id: undefined; query: undefined; body: { name: string; goals?: Goal[] }; answer: Campaign };
  /** Campaigns, ordered by id. */
  listCampaigns: {
    id: undefined;
    query: { limit?: number; after?: string; format?: 'json' | 'csv' };
    body: undefined;
    answer: { items: Campaign[]; next: string | null };
  };
  /** One campaign, by id or name. */
  getCampaign: { id: string; query: { format?: 'json' | 'csv' }; body: undefined; answer: Campaign };
  /** Give a campaign another name. */
  renameCampaign: { id: string; query: undefined; body: { name: string }; answer: Campaign };
  /** Delete a campaign with everything in it. */
  deleteCampaign: { id: string; query: { confirm: string }; body: undefined; answer: undefined };
  /** Put these goals in the place of those set before; those of goal.csv stay. The forecasts follow. */
  setGoals: { id: string; query: undefined; body: { goals: Goal[] }; answer: { goals: Goal[] } };
  /** Queue the fit of every sample again. */
  refitCampaign: { id: string; query: undefined; body: undefined; answer: Campaign };
  /** Send one file: a scan, a sheet, or a .gz or .zip of them. */
  putFile: { id: string; query: { path: string }; body: Blob | Uint8Array<ArrayBuffer> | string; answer: ReceivedFile };
  /** Send a handful of files as a form: at most 50 files and 8 MB. */
  postFiles: {
    id: string;
    query: { format?: 'json' | 'csv' };
    body: FormData;
    answer: { items: ReceivedFile[]; next: string | null };
  };
  /** Every scan and what was found in it. */
  listScans: {
    id: string;
    query: { limit?: number; after?: string; format?: 'json' | 'csv'; sample?: string };
    body: undefined;
    answer: { items: ScansRow[]; next: string | null };
  };
  /** Where the campaign stands. */
  getStatus: { id: string; query: { format?: 'json' | 'csv' }; body: undefined; answer: CampaignStatus };
  /** The same as server-sent events `status`, one at every change. */
  streamStatus: { id: string; query: undefined; body: undefined; answer: Response };
  /** What a page about a campaign, or about one sample of it, shows first: everything in one answer. */
  getOverview: { id: string; query: { sample?: string }; body: undefined; answer: Overview };
  /** The consolidated kinetic parameters. */
  listParameters: {
    id: string;
    query: {
      limit?: number;
      after?: string;
      format?: 'json' | 'csv';
      sample?: string;
      quantity?: string;
      method?: string;
      event?: number;
    };
    body: undefined;
    answer: { items: ParametersRow[]; next: string | null };
  };
  /** The reduced curves. */
  listConversion: {
    id: string;
    query: { limit?: number; after?: string; format?: 'json' | 'csv'; sample?: string };
    body: undefined;
    answer: { items: ConversionRow[]; next: string | null };
  };
  /** Whether the bend of each event over the rates is the material’s, an instrument’s, or none. */
  listVerdicts: {
    id: string;
    query: { limit?: number; after?: string; format?: 'json' | 'csv'; sample?: string };
    body: undefined;
    answer: { items: VerdictsRow[]; next: string | null };
  };
  /** Instruments with their corrections. */
  listInstruments: {
    id: string;
    query: { limit?: number; after?: string; format?: 'json' | 'csv' };
    body: undefined;
    answer: { items: InstrumentsRow[]; next: string | null };
  };
  /** Which decades of heating rate each sample has been measured in. */
  listCoverage: {
    id: string;
    query: { limit?: number; after?: string; format?: 'json' | 'csv'; sample?: string };
    body: undefined;
    answer: { items: CoverageRow[]; next: string | null };
  };
  /** What is missing, and what to do about it. */
  listGaps: {
    id: string;
    query: { limit?: number; after?: string; format?: 'json' | 'csv'; sample?: string };
    body: undefined;
    answer: { items: GapsRow[]; next: string | null };
  };
  /** Times and conversions to come. An aid to planning experiments, not a basis for process-safety, medical or release decisions; follow the applicable standards and qualified practice. */
  listForecasts: {
    id: string;
    query: { limit?: number; after?: string; format?: 'json' | 'csv'; sample?: string };
    body: undefined;
    answer: { items: ForecastsRow[]; next: string | null };
  };
  /** The scans that would narrow each interval most. An aid to planning experiments, not a basis for process-safety, medical or release decisions; follow the applicable standards and qualified practice. */
  listAdvice: {
    id: string;
    query: { limit?: number; after?: string; format?: 'json' | 'csv'; sample?: string };
    body: undefined;
    answer: { items: AdviceRow[]; next: string | null };
  };
  /** What to know and what to do. */
  listFlags: {
    id: string;
    query: { limit?: number; after?: string; format?: 'json' | 'csv'; sample?: string };
    body: undefined;
    answer: { items: FlagsRow[]; next: string | null };
  };
  /** All result files of a campaign in one archive. */
  getResults: { id: string; query: undefined; body: undefined; answer: Response };
  /** The report of a campaign: one page with every plot and table, without network. */
  getReport: { id: string; query: undefined; body: undefined; answer: Response };
  /** Answer one question about times, temperatures and conversions, from the draws of the last fit. */
  forecast: { id: string; query: { format?: 'json' | 'csv' }; body: ForecastQuestion; answer: ForecastAnswer };
  /** One sample and its scans. Its numbers are in the parameters table of its campaign. */
  getSample: { id: string; query: { format?: 'json' | 'csv' }; body: undefined; answer: Sample };
  /** Curves of one kind, at most 2000 points each, extremes kept. */
  getSampleCurves: {
    id: string;
    query: {
      kind:
        | 'thermogram'
        | 'baseline'
        | 'conversion'
        | 'kissinger'
        | 'energy'
        | 'local_energy'
        | 'growth'
        | 'viscosity'
        | 'ttt'
        | 'constant_heating';
      format?: 'json' | 'csv';
    };
    body: undefined;
    answer: Curves;
  };
  /** One scan. */
  getScan: { id: string; query: { format?: 'json' | 'csv' }; body: undefined; answer: Scan };
  /** Correct what the sheet says of a scan. */
  correctScan: { id: string; query: undefined; body: ScanCorrections; answer: Scan };
  /** What was corrected on a scan, oldest first. */
  listScanHistory: {
    id: string;
    query: { format?: 'json' | 'csv' };
    body: undefined;
    answer: { items: ScanHistoryEntry[]; next: string | null };
  };
  /** The file as it came, byte for byte. */
  getOriginal: { id: string; query: undefined; body: undefined; answer: Response };
  /** One instrument and its correction. */
  getInstrument: { id: string; query: undefined; body: undefined; answer: Instrument };
  /** How late its standards melt against heating rate, and the correction drawn from them. */
  getInstrumentCurves: {
    id: string;
    query: { kind: 'calibration'; format?: 'json' | 'csv' };
    body: undefined;
    answer: CalibrationCurves;
  };
  /** Jobs, ordered by id. */
  listJobs: {
    id: undefined;
    query: {
      state?: 'queued' | 'running' | 'done' | 'failed';
      campaign?: string;
      limit?: number;
      after?: string;
      format?: 'json' | 'csv';
    };
    body: undefined;
    answer: { items: Job[]; next: string | null };
  };
  /** Queue a failed job again with fresh attempts. */
  retryJob: { id: string; query: undefined; body: undefined; answer: Job };
  /** This interface as an OpenAPI 3.1 document. */
  getOpenapi: { id: undefined; query: undefined; body: undefined; answer: Record<string, unknown> };
  /** This interface as a page to read. */
  getReference: { id: undefined; query: undefined; body: undefined; answer: Response };
  /** The process is alive. */
  getHealth: { id: undefined; query: undefined; body: undefined; answer: { status: 'alive' } };
  /** The database and the blob store can be reached. */
  getReadiness: { id: undefined; query: undefined; body: undefined; answer: { status: 'ready' } };
  /** Figures of this process and of the queue as OpenMetrics. Off loopback for keepers. */
  getMetrics: { id: undefined; query: undefined; body: undefined; answer: Response };
}

/** Method and route of every operation. */
export const OPERATIONS = {
  createCampaign: ['POST', '/v1/campaigns'],
  listCampaigns: ['GET', '/v1/campaigns'],
  getCampaign: ['GET', '/v1/campaigns/{id}'],
  renameCampaign: ['PATCH', '/v1/campaigns/{id}'],
  deleteCampaign: ['DELETE', '/v1/campaigns/{id}'],
  setGoals: ['PUT', '/v1/campaigns/{id}/goals'],
  refitCampaign: ['POST', '/v1/campaigns/{id}/refit'],
  putFile: ['PUT', '/v1/campaigns/{id}/files'],
  postFiles: ['POST', '/v1/campaigns/{id}/scans'],
  listScans: ['GET', '/v1/campaigns/{id}/scans'],
  getStatus: ['GET', '/v1/campaigns/{id}/status'],
  streamStatus: ['GET', '/v1/campaigns/{id}/stream'],
  getOverview: ['GET', '/v1/campaigns/{id}/overview'],
  listParameters: ['GET', '/v1/campaigns/{id}/parameters'],
  listConversion: ['GET', '/v1/campaigns/{id}/conversion'],
  listVerdicts: ['GET', '/v1/campaigns/{id}/verdicts'],
  listInstruments: ['GET', '/v1/campaigns/{id}/instruments'],
  listCoverage: ['GET', '/v1/campaigns/{id}/coverage'],
  listGaps: ['GET', '/v1/campaigns/{id}/gaps'],
  listForecasts: ['GET', '/v1/campaigns/{id}/forecasts'],
  listAdvice: ['GET', '/v1/campaigns/{id}/advice'],
  listFlags: ['GET', '/v1/campaigns/{id}/flags'],
  getResults: ['GET', '/v1/campaigns/{id}/results.zip'],
  getReport: ['GET', '/v1/campaigns/{id}/report'],
  forecast: ['POST', '/v1/samples/{id}/forecasts'],
  getSample: ['GET', '/v1/samples/{id}'],
  getSampleCurves: ['GET', '/v1/samples/{id}/curves'],
  getScan: ['GET', '/v1/scans/{id}'],
  correctScan: ['PATCH', '/v1/scans/{id}'],
  listScanHistory: ['GET', '/v1/scans/{id}/history'],
  getOriginal: ['GET', '/v1/scans/{id}/original'],
  getInstrument: ['GET', '/v1/instruments/{id}'],
  getInstrumentCurves: ['GET', '/v1/instruments/{id}/curves'],
  listJobs: ['GET', '/v1/jobs'],
  retryJob: ['POST', '/v1/jobs/{id}/retry'],
  getOpenapi: ['GET', '/v1/openapi.json'],
  getReference: ['GET', '/v1/reference'],
  getHealth: ['GET', '/healthz'],
  getReadiness: ['GET', '/readyz'],
  getMetrics: ['GET', '/metrics'],
} as const satisfies Record<keyof Operations, readonly [string, string]>;
