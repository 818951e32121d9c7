import type { SQL } from 'drizzle-orm';
import { type SqlText, type Statement, text } from './statement.ts';

/** The steps and their priority, lower first: what decides over many scans goes before the scans, fits before further reading. */
export const STEP_PRIORITY = {
  'read-sheet': 0,
  'unpack-archive': 0,
  'assign-scans': 1,
  'calibrate-instrument': 2,
  'reduce-scan': 3,
  'fit-sample': 4,
  'judge-curvature': 4,
  'forecast-sample': 4,
  'read-scan': 5,
  'plan-campaign': 6,
} as const;
export type Step = keyof typeof STEP_PRIORITY;

/** A burst of uploads is assigned once: the job waits this long unless a worker has nothing else to do. */
export const ASSIGN_DELAY_MS = 200;

/** Steps after which the set of scans may be another: nothing is calibrated or fitted while one is open. */
const OPENING_STEPS = text`('read-sheet', 'unpack-archive', 'assign-scans')`;

export interface NewJob {
  id: string;
  campaignId: string;
  step: Step;
  subject: string;
  now: number;
  delayMs?: number;
  /** The caller sends its wake-up itself. */
  woken?: boolean;
}

/** Queues a job unless one for the same step and subject waits already. */
export function insertJob({ id, campaignId, step, subject, now, delayMs = 0, woken = false }: NewJob): Statement {
  return text`
    insert into jobs (id, campaign_id, step, subject, priority, state, next_try_at, created_at, woken)
    values (${id}, ${campaignId}, ${step}, ${subject}, ${STEP_PRIORITY[step]}, 'queued', ${now + delayMs}, ${now}, ${woken ? 1 : 0})
    on conflict do nothing`;
}

/** Queues one job for each subject that `from` selects as `subject`; a waiting twin is enough. */
function insertJobsFor(campaignId: string, step: Step, now: number, from: SqlText): Statement {
  return text`
    insert or ignore into jobs (id, campaign_id, step, subject, priority, state, next_try_at, created_at)
    select 'j_' || lower(hex(randomblob(12))), ${campaignId}, ${step}, subject, ${STEP_PRIORITY[step]}, 'queued', ${now}, ${now}
    from (${from})`;
}

/** What a write-back may have made due. */
export interface DueCheck {
  /** Scans were read or assigned, so an instrument may have all of its scans read. */
  instruments?: boolean;
  /** Scans were settled or assigned, so a sample may have all of its scans settled. */
  samples?: boolean;
}

/**
 * Ends every write-back: counts a change of the campaign and queues what has become due in it: instruments whose scans are
 * all read, samples whose scans are all settled, and the plan once nothing else is open. Whatever holds one back ends in a
 * write-back that checks again, so nothing waits for ever.
 */
export function queueDueJobs(
  campaignId: string,
  now: number,
  { instruments = false, samples = false }: DueCheck,
): Statement[] {
  return [
    ...(instruments ? queueCalibrations(campaignId, now) : []),
    ...(samples ? queueFits(campaignId, now) : []),
    text`
      update campaigns set revision = revision + 1, inputs_revision = inputs_revision + 1,
        queued_revision = case when ${nothingOpen(campaignId)} then inputs_revision + 1 else queued_revision end
      where id = ${campaignId}`,
    insertJobsFor(
      campaignId,
      'plan-campaign',
      now,
      text`select id as subject from campaigns where id = ${campaignId} and inputs_revision = queued_revision and ${nothingOpen(campaignId)}`,
    ),
  ];
}

const nothingOpen = (campaignId: string) => text`not exists (
  select 1 from jobs where campaign_id = ${campaignId} and state in ('queued', 'running') and step <> 'plan-campaign')`;

const scansOpen = (campaignId: string) => text`exists (
  select 1 from jobs where campaign_id = ${campaignId} and state in ('queued', 'running') and step in ${OPENING_STEPS})`;

function queueCalibrations(campaignId: string, now: number): Statement[] {
  // Without a kind on its sheet an instrument is told by its fastest scan, so all of them have to be read first; its
  // standards have to be reduced.
  const due = text`instruments.campaign_id = ${campaignId} and inputs_revision > queued_revision and not ${scansOpen(campaignId)}
    and (json_extract(sheet_row, '$.kind') is not null or not exists (
      select 1 from scans s where s.campaign_id = ${campaignId} and s.instrument = instruments.instrument and s.status = 'received'))
    and not exists (
      select 1 from scans s where s.campaign_id = ${campaignId} and s.instrument = instruments.instrument
        and s.status in ('received', 'read') and s.role = 'standard' and s.disposition = 'assigned')`;
  return [
    insertJobsFor(campaignId, 'calibrate-instrument', now, text`select id as subject from instruments where ${due}`),
    text`update instruments set queued_revision = inputs_revision where ${due}`,
  ];
}

function queueFits(campaignId: string, now: number): Statement[] {
  const due = text`samples.campaign_id = ${campaignId} and state in ('waiting', 'stale') and inputs_revision > queued_revision
    and not ${scansOpen(campaignId)} and not exists (
      select 1 from scans s where s.campaign_id = ${campaignId} and s.sample = samples.sample
        and s.status in ('received', 'read') and s.role = 'sample')
    and not exists (
      select 1 from sheet_rows p inner join instruments i on i.campaign_id = p.campaign_id and i.instrument = json_extract(p.body, '$.instrument')
      where p.campaign_id = ${campaignId} and p.sheet = 'peaks' and json_extract(p.body, '$.sample') = samples.sample
        and i.calibrated_revision < i.inputs_revision)`;
  return [
    insertJobsFor(campaignId, 'fit-sample', now, text`select id as subject from samples where ${due}`),
    text`update samples set queued_revision = inputs_revision, state = 'queued' where ${due}`,
  ];
}

/** Queues the reduction of scans that are read, assigned, and standards or on a calibrated instrument: of one file, of one instrument, or all. */
export function queueReductions(
  campaignId: string,
  now: number,
  { fileId, instrument }: { fileId?: string; instrument?: string } = {},
): Statement[] {
  const ofFile = fileId === undefined ? text`` : text`and scans.file_id = ${fileId}`;
  const ofInstrument = instrument === undefined ? text`` : text`and scans.instrument = ${instrument}`;
  const due = text`scans.campaign_id = ${campaignId} ${ofFile} ${ofInstrument} and scans.status = 'read' and disposition = 'assigned'
    and inputs_revision > queued_revision and (role = 'standard' or exists (
      select 1 from instruments i where i.campaign_id = ${campaignId} and i.instrument = scans.instrument
      and i.calibration is not null and i.calibrated_revision = i.inputs_revision))`;
  return [
    insertJobsFor(campaignId, 'reduce-scan', now, text`select id as subject from scans where ${due}`),
    text`update scans set queued_revision = inputs_revision where ${due}`,
  ];
}

/**
 * Queues verdict and forecasts of every fitted sample: sheets without scans, goals or the instruments have changed. Where nothing
 * that they rest on is another, they are look-ups.
 */
export const queueJudgements = (campaignId: string, now: number): Statement =>
  insertJobsFor(
    campaignId,
    'judge-curvature',
    now,
    text`select id as subject from samples where campaign_id = ${campaignId} and fit_key is not null`,
  );

/** Marks samples as having newer inputs than their fit; `names` is a subquery of sample names. */
export function touchSamples(campaignId: string, names: SqlText | SQL): Statement {
  return text`
    update samples set inputs_revision = inputs_revision + 1,
      state = case when state in ('waiting', 'queued') and fit_key is null then 'waiting' else 'stale' end
    where campaign_id = ${campaignId} and sample in (${names})`;
}

/** Marks instruments as having newer standards than their calibration; `names` is a subquery of instrument names. */
export const touchInstruments = (campaignId: string, names: SqlText): Statement =>
  text`
    update instruments set inputs_revision = inputs_revision + 1
    where campaign_id = ${campaignId} and instrument in (${names})`;

/** Counts a change of what the campaign shows; of `inputs` too where a new plan may be due. */
export function touchCampaign(campaignId: string, inputs: boolean): Statement {
  return inputs
    ? text`update campaigns set revision = revision + 1, inputs_revision = inputs_revision + 1 where id = ${campaignId}`
    : text`update campaigns set revision = revision + 1 where id = ${campaignId}`;
}
