import { FORECAST_CAUTION } from '../schema/wire/forecasts.ts';
import type { ResultTable } from '../schema/wire/result-tables.ts';

/**
 * What stands beside each operation of the document: its stable name (that of the typed client's method too), a body
 * that may be sent and one that comes back. From the synthetic demo campaign, digits cut. A test holds the bodies to
 * their schemas and the list to the routes.
 */
export interface OperationExamples {
  id: string;
  request?: unknown;
  answer?: unknown;
}

const CAMPAIGN_ID = 'c_127e5a616ea32bb7c2ca1d2e';
const SAMPLE_ID = 'm_8aec9c2545419310b7db9ed3';
const SCAN_ID = 's_3a05d0e69094535dfbcc5b91';
const INSTRUMENT_ID = 'i_ad35d3a3b4bfaea844a8cb17';
const MADE_AT = '2026-01-31T11:56:09.498Z';
const FILE = 'ribbon/furnace-east/heating-10.txt';

const campaign = { id: CAMPAIGN_ID, name: 'films', created_at: MADE_AT, revision: 130 };
const page = (item: unknown) => ({ items: [item], next: null });

/** One row of each result table. */
const ROWS: Record<ResultTable, Record<string, unknown>> = {
  parameters: {
    sample: 'ribbon',
    event: 1,
    quantity: 'activation_energy',
    method: 'kissinger',
    conversion: null,
    temperature_K: null,
    value: 310.3,
    unit: 'kJ/mol',
    lower95: 308.8,
    upper95: 311.7,
    scan_count: 12,
    rate_min_K_per_s: 0.0333,
    rate_max_K_per_s: 0.666,
    flags: [],
    interval: 'monte_carlo',
    variant: '',
  },
  scans: {
    file: FILE,
    sha256: 'a190885d73f51765cc28ff8ed162533cebf8504606dfc16718b8a3bf4db4b3b2',
    sample: 'ribbon',
    instrument: 'furnace-east',
    role: 'sample',
    event: 1,
    status: 'reduced',
    reason: null,
    rate_nominal_K_per_s: 0.1667,
    rate_K_per_s: 0.1671,
    mass_mg: 8.224,
    glass_transition_K: 630.1,
    onset_K: 688.6,
    peak_K: 695.3,
    end_K: 699.5,
    width_K: 6.48,
    enthalpy_J_per_g: 95,
    flags: [],
    segment: 1,
    replicate: 'a',
    centroid_K: 693.9,
  },
  conversion: {
    file: FILE,
    segment: 1,
    sample: 'ribbon',
    instrument: 'furnace-east',
    event: 1,
    conversion: 0.5,
    time_s: 569.8,
    temperature_K: 694.2,
    rate_per_s: 0.0238,
  },
  instruments: {
    instrument: 'furnace-east',
    kind: 'furnace',
    offset_K: 0.4,
    offset_se_K: 0.1,
    lag_s: 2,
    lag_se_s: 0.1,
    heat_factor: null,
    heat_factor_se: null,
    standards: 0,
    source: 'sheet',
    offset_slope: null,
    response_time_s: 1,
  },
  verdicts: {
    sample: 'ribbon',
    event: 1,
    verdict: 'straight',
    bend: -0.01,
    bend_lower99: -0.09,
    bend_upper99: 0.07,
    p_value: 0.61,
    delta_aicc: -2.5,
    energy_low_rate_kJ_per_mol: 310.4,
    energy_high_rate_kJ_per_mol: 310.4,
    instruments: ['furnace-east', 'furnace-west'],
    rate_min_K_per_s: 0.0333,
    rate_max_K_per_s: 0.666,
    decides_next: '',
  },
  forecasts: {
    sample: 'ribbon',
    event: 1,
    method: 'shared_law',
    conversion: 0.01,
    temperature_C: 320,
    program: '',
    value: 250_900,
    unit: 's',
    lower95: 227_900,
    upper95: 276_200,
    beyond_measured_K: 49.3,
    flags: ['extrapolates'],
    question: 'time_to_conversion',
    time_s: null,
    goal: '',
    beyond_measured_decades: 3.83,
    detail: 'At least 2.64 days, most likely 2.9 days, at most 3.2 days.',
    caution: FORECAST_CAUTION,
  },
  advice: {
    sample: 'ribbon',
    rank: 1,
    instrument: 'furnace-east',
    rate_K_per_s: 0.0167,
    goal: 'energy',
    interval_now: 3.31,
    interval_expected: 2.91,
    event: 1,
    unit: 'kJ/mol',
    scans_to_half: null,
    sentence: 'One more scan at 0.0167 K/s (1 K/min) on furnace-east widens the rates downwards by a factor of 2.',
    caution: FORECAST_CAUTION,
  },
  coverage: {
    sample: 'ribbon',
    decade_low_K_per_s: 0.01,
    decade_high_K_per_s: 0.1,
    instrument: 'furnace-east',
    scan_count: 4,
    rates: [0.0334, 0.0833],
  },
  gaps: {
    sample: 'film',
    code: 'decade-gap',
    detail: 'No scan between 100 and 1000 K/s, while there are scans at 60 K/s below and 2000 K/s above.',
    action: 'Run about 300 K/s on chip-north.',
  },
  flags: {
    severity: 'warn',
    code: 'decade-gap',
    sample: 'film',
    instrument: null,
    file: null,
    event: null,
    detail: 'No scan between 100 and 1000 K/s, while there are scans at 60 K/s below and 2000 K/s above.',
    action: 'Run about 300 K/s on chip-north.',
  },
};

const received = { file: FILE, outcome: 'accepted', scan_ids: [SCAN_ID], job_id: 'j_029779ddb71944e82da9b1b6' };
const job = {
  id: 'j_029779ddb71944e82da9b1b6',
  campaign_id: CAMPAIGN_ID,
  step: 'read-scan',
  subject: 'f_87a27ed8a74223878407f34e',
  state: 'done',
  attempts: 1,
  last_error: null,
  next_try_at: MADE_AT,
  created_at: MADE_AT,
  started_at: MADE_AT,
  finished_at: MADE_AT,
};
const scan = {
  id: SCAN_ID,
  campaign_id: CAMPAIGN_ID,
  bytes: 134_288,
  rows: [ROWS.scans],
  corrections: { mass_mg: 8.224 },
};
const goals = [{ sample: 'ribbon', conversion: 0.01, temperature_C: 250, time_s: 3.2e7 }];
const curves = {
  kind: 'kissinger',
  x: { quantity: 'reciprocal peak temperature', unit: '1/K' },
  y: { quantity: 'ln(heating rate / peak temperature squared)', unit: 'ln(1/(K s))' },
  series: [{ name: 'event 1, furnace-east', instrument: 'furnace-east', x: [0.001438, 0.001421], y: [-14.9, -14.2] }],
};
const status = {
  settled: true,
  scans: {
    received: 0,
    read: 0,
    reduced: 12,
    set_aside: 1,
    failed: 0,
    unassigned: 0,
    excluded: 0,
    superseded: 0,
  },
  samples: [{ id: SAMPLE_ID, sample: 'ribbon', state: 'fitted', verdict: 'straight' }],
  jobs: { queued: 0, running: 0, failed: 0, oldest_age_s: null },
  eta_s: 0,
};

const tables = Object.fromEntries(
  Object.entries(ROWS).map(([table, row]) => [
    `get /v1/campaigns/{id}/${table}`,
    { id: `list${table[0].toUpperCase()}${table.slice(1)}`, answer: page(row) },
  ]),
);

export const EXAMPLES: Readonly<Record<string, OperationExamples>> = {
  'post /v1/campaigns': { id: 'createCampaign', request: { name: 'films' }, answer: campaign },
  'get /v1/campaigns': { id: 'listCampaigns', answer: page(campaign) },
  'get /v1/campaigns/{id}': {
    id: 'getCampaign',
    answer: { ...campaign, instruments: [{ id: INSTRUMENT_ID, instrument: 'furnace-east' }] },
  },
  'patch /v1/campaigns/{id}': { id: 'renameCampaign', request: { name: 'films' }, answer: campaign },
  'delete /v1/campaigns/{id}': { id: 'deleteCampaign' },
  'put /v1/campaigns/{id}/goals': { id: 'setGoals', request: { goals }, answer: { goals } },
  'post /v1/campaigns/{id}/refit': { id: 'refitCampaign', answer: campaign },
  'put /v1/campaigns/{id}/files': { id: 'putFile', answer: received },
  'post /v1/campaigns/{id}/scans': { id: 'postFiles', answer: page(received) },
  'get /v1/campaigns/{id}/status': { id: 'getStatus', answer: status },
  'get /v1/campaigns/{id}/stream': {
    id: 'streamStatus',
    answer: `event: status\nid: 130.0.0.0\ndata: ${JSON.stringify(status)}\n\n`,
  },
  'get /v1/campaigns/{id}/overview': {
    id: 'getOverview',
    answer: {
      campaign,
      status,
      state: '130.0.0.0',
      tables: { scans: [ROWS.scans], verdicts: [ROWS.verdicts], instruments: [ROWS.instruments] },
      is_whole: true,
      scans: [{ id: SCAN_ID, file: FILE, instrument: 'furnace-east', status: 'reduced' }],
      outlines: [curves],
    },
  },
  ...tables,
  'get /v1/campaigns/{id}/results.zip': { id: 'getResults' },
  'get /v1/campaigns/{id}/report': { id: 'getReport' },
  'get /v1/samples/{id}': {
    id: 'getSample',
    answer: {
      id: SAMPLE_ID,
      campaign_id: CAMPAIGN_ID,
      sample: 'ribbon',
      state: 'fitted',
      reason: null,
      scans: [{ id: SCAN_ID, file: FILE, instrument: 'furnace-east', status: 'reduced' }],
    },
  },
  'get /v1/samples/{id}/curves': { id: 'getSampleCurves', answer: curves },
  'post /v1/samples/{id}/forecasts': {
    id: 'forecast',
    request: { temperature_C: 320, conversion: 0.01 },
    answer: { items: [ROWS.forecasts], caution: FORECAST_CAUTION },
  },
  'get /v1/scans/{id}': { id: 'getScan', answer: scan },
  'patch /v1/scans/{id}': { id: 'correctScan', request: { mass_mg: 8.224 }, answer: scan },
  'get /v1/scans/{id}/history': {
    id: 'listScanHistory',
    answer: page({ field: 'mass_mg', before: null, after: 8.224, cause: 'correction', at: MADE_AT }),
  },
  'get /v1/scans/{id}/original': { id: 'getOriginal' },
  'get /v1/instruments/{id}': {
    id: 'getInstrument',
    answer: { id: INSTRUMENT_ID, campaign_id: CAMPAIGN_ID, instrument: 'furnace-east', row: ROWS.instruments },
  },
  'get /v1/instruments/{id}/curves': {
    id: 'getInstrumentCurves',
    answer: {
      kind: 'calibration',
      x: { quantity: 'heating rate', unit: 'K/s' },
      y: { quantity: 'measured onset − melting temperature', unit: 'K' },
      series: [{ name: 'indium', x: [0.0333, 0.167], y: [0.47, 0.73], lower: [0.45, 0.71], upper: [0.49, 0.75] }],
    },
  },
  'get /v1/jobs': { id: 'listJobs', answer: page(job) },
  'post /v1/jobs/{id}/retry': {
    id: 'retryJob',
    answer: { ...job, state: 'queued', attempts: 0, started_at: null, finished_at: null },
  },
  'get /v1/openapi.json': { id: 'getOpenapi', answer: { openapi: '3.1.0' } },
  'get /v1/reference': { id: 'getReference' },
  'get /healthz': { id: 'getHealth', answer: { status: 'alive' } },
  'get /readyz': { id: 'getReadiness', answer: { status: 'ready' } },
  'get /metrics': { id: 'getMetrics', answer: '# TYPE ratespan_jobs gauge\nratespan_jobs{state="queued"} 0\n# EOF\n' },
};
