import { encodeForecastSource } from '../../schema/wire/forecast-blob.ts';
import type { GoalRow, ProgrammeTable } from '../../schema/wire/forecasts.ts';
import { decodePacked, encodePacked } from '../../schema/wire/packed-blob.ts';
import type { SampleForecastResult } from '../../schema/wire/sample-forecast.ts';
import type { InstrumentCalibration } from '../../schema/wire/scan.ts';
import type { JudgeResult } from '../../schema/wire/verdicts.ts';
import { readProgram } from '../instrument/index.ts';
import type { Ports } from '../ports/index.ts';
import type { FitRows } from '../store/fit-rows.ts';
import { forecastBlobKey, forecastSourceKey } from '../store/forecast-sources.ts';
import { hashOf } from '../store/ids.ts';
import { saveForecasts } from '../store/judge-rows.ts';
import { type ClaimedJob, completeJob } from '../store/leases.ts';
import { loadBench, loadGoals, loadPrograms, type ProgramFile } from '../store/question-rows.ts';
import { readStoredFit } from './fit-sample.ts';
import { type JudgeFacts, judgeKeyOf, loadJudgeFacts, readStoredJudgement } from './judge-curvature.ts';
import { readDerived } from './read-derived.ts';
import { inputsKeyOf, loadFitScans, loadOrderedFit } from './sample-inputs.ts';
import { STEP_VERSIONS } from './settings.ts';

/** A forecast as it is kept: everything but the sources, which have blobs of their own. */
type StoredForecast = Omit<SampleForecastResult, 'sources'> & { events: number[] };

interface ForecastRows {
  rows: FitRows;
  facts: JudgeFacts;
  judgeKey: string;
  goals: GoalRow[];
  programs: ProgramFile[];
  instruments: InstrumentCalibration[];
}

/** Step `forecast-sample`: forecasts, critical rates and advice from what fit and verdict left. Passed over where either is not up to date. */
export async function forecastStoredSample(ports: Ports, job: ClaimedJob): Promise<void> {
  const input = await loadForecastRows(ports, job.subject);
  if (!input) return completeJob(ports, job);
  const { sample } = input.rows;
  const forecastKey = forecastKeyOf(input);
  const stored = await readDerived(ports, blobKeyOf(input, forecastKey), decodePacked<StoredForecast>);
  if (stored && sample.forecastKey === forecastKey) return completeJob(ports, job);
  const found = stored ?? (await forecastRows(ports, input, forecastKey));
  if (!found) return completeJob(ports, job);
  await completeJob(ports, job, (db) => saveForecasts(db, sample, forecastKey, found));
}

async function loadForecastRows(ports: Ports, sampleId: string): Promise<ForecastRows | undefined> {
  const rows = await loadOrderedFit(ports, sampleId);
  if (!rows || (rows.sample.state !== 'fitted' && rows.sample.state !== 'insufficient')) return undefined;
  const { campaignId, sample } = rows.sample;
  const facts = await loadJudgeFacts(ports, rows);
  const judgeKey = judgeKeyOf(rows, facts);
  // Another verdict is on its way, and a forecast after it.
  if (rows.sample.judgeKey !== judgeKey) return undefined;
  return {
    rows,
    facts,
    judgeKey,
    goals: (await loadGoals(ports, campaignId, sample)).map(({ line: _line, ...goal }) => goal),
    programs: await loadPrograms(ports, campaignId),
    instruments: (await loadBench(ports, campaignId)).instruments,
  };
}

const forecastKeyOf = ({ judgeKey, goals, programs, instruments }: ForecastRows): string =>
  hashOf([
    'forecast-sample',
    STEP_VERSIONS['forecast-sample'],
    judgeKey,
    goals,
    programs.map(({ path, sha256 }) => [path, sha256]),
    instruments,
  ]);

const blobKeyOf = ({ rows }: ForecastRows, forecastKey: string) => forecastBlobKey(rows.sample.campaignId, forecastKey);

async function forecastRows(
  ports: Ports,
  input: ForecastRows,
  forecastKey: string,
): Promise<StoredForecast | undefined> {
  const { rows, facts, judgeKey, goals, instruments } = input;
  const { campaignId } = rows.sample;
  const stored = await readStoredFit(ports, rows, inputsKeyOf(rows));
  const judged: JudgeResult | undefined = await readStoredJudgement(ports, rows, judgeKey);
  if (!stored || !judged) throw new Error(`the fit or the verdict of ${rows.sample.sample} is gone; queue a refit`);
  const { sources, ...found } = await ports.compute.forecastSample({
    sample: rows.sample.sample,
    facts: facts.facts,
    parameters: stored.fit.parameters,
    modelFree: stored.fit.modelFree ?? [],
    judged: { verdicts: judged.verdicts, sharedLaws: judged.sharedLaws },
    goals,
    programmes: await readProgrammes(ports, input.programs),
    scans: (await loadFitScans(ports, rows)).scans,
    instruments,
    ranges: facts.ranges,
  });
  for (const source of sources)
    await ports.blobs.put(forecastSourceKey(campaignId, forecastKey, source.event), encodeForecastSource(source));
  const kept: StoredForecast = { ...found, events: sources.map(({ event }) => event) };
  await ports.blobs.put(blobKeyOf(input, forecastKey), encodePacked(kept));
  return kept;
}

async function readProgrammes(ports: Ports, programs: readonly ProgramFile[]): Promise<ProgrammeTable[]> {
  const programmes: ProgrammeTable[] = [];
  for (const { path, blobKey } of programs) {
    const { programme } = readProgram(await ports.blobs.bytes(blobKey), path);
    if (programme) programmes.push(programme);
  }
  return programmes;
}
