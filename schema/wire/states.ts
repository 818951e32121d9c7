/** Closed sets of states. */
export const SCAN_STATES = [
  'received',
  'read',
  'reduced',
  'set_aside',
  'failed',
  'unassigned',
  'excluded',
  'superseded',
] as const;
export type ScanState = (typeof SCAN_STATES)[number];
/** Scan states after which nothing more happens by itself. */
export const SETTLED_SCAN_STATES: readonly ScanState[] = [
  'reduced',
  'set_aside',
  'failed',
  'unassigned',
  'excluded',
  'superseded',
];

export const SAMPLE_STATES = ['waiting', 'queued', 'fitting', 'fitted', 'insufficient', 'failed', 'stale'] as const;
export type SampleState = (typeof SAMPLE_STATES)[number];

export const JOB_STATES = ['queued', 'running', 'done', 'failed'] as const;
export type JobState = (typeof JOB_STATES)[number];

export const ROLES = ['sample', 'standard', 'blank'] as const;
export type Role = (typeof ROLES)[number];

export const INSTRUMENT_KINDS = ['furnace', 'chip'] as const;
export type InstrumentKind = (typeof INSTRUMENT_KINDS)[number];

export const EXOTHERM_DIRECTIONS = ['up', 'down'] as const;
export type ExothermDirection = (typeof EXOTHERM_DIRECTIONS)[number];

/** What a token allows: each role also what the ones before it do. */
export const TOKEN_ROLES = ['reader', 'sender', 'keeper'] as const;
export type TokenRole = (typeof TOKEN_ROLES)[number];
