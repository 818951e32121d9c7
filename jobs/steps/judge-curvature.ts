import { decodePacked, encodePacked } from '../../schema/wire/packed-blob.ts';
import type { SampleSheetRow } from '../../schema/wire/scan.ts';
import type { GlassFacts, InstrumentRange, JudgeResult } from '../../schema/wire/verdicts.ts';
import type { Ports } from '../ports/index.ts';
import type { FitRows } from '../store/fit-rows.ts';
import { hashOf } from '../store/ids.ts';
import { judgementKey, queueNext, saveJudgement } from '../store/judge-rows.ts';
import { type ClaimedJob, completeJob } from '../store/leases.ts';
import { loadBench, loadCompositions, loadViscosities } from '../store/question-rows.ts';
import { readDerived } from './read-derived.ts';
import { inputsKeyOf, loadFitScans, loadOrderedFit, seedOf } from './sample-inputs.ts';
import { FIT_DRAWS, STEP_VERSIONS } from './settings.ts';

/** What the verdict of a sample rests on beside its scans. */
export interface JudgeFacts {
  facts: GlassFacts;
  ranges: InstrumentRange[];
}

/**
 * Step `judge-curvature`: whether the bend of each event is the material's or an instrument's, and the glass layer. A sample whose fit is
 * not up to date is passed over: its next fit queues this again.
 */
export async function judgeStoredSample(ports: Ports, job: ClaimedJob): Promise<void> {
  const rows = await loadOrderedFit(ports, job.subject);
  if (!rows || (rows.sample.state !== 'fitted' && rows.sample.state !== 'insufficient')) return completeJob(ports, job);
  const { sample } = rows;
  const facts = await loadJudgeFacts(ports, rows);
  const judgeKey = judgeKeyOf(rows, facts);
  const known = sample.judgeKey === judgeKey && (await readStoredJudgement(ports, rows, judgeKey));
  const judged =
    known || (await readStoredJudgement(ports, rows, judgeKey)) || (await judgeRows(ports, rows, facts, judgeKey));
  await completeJob(ports, job, (db, now) => [
    ...(known ? [] : saveJudgement(db, sample, judgeKey, judged)),
    queueNext(sample, 'forecast-sample', now),
  ]);
}

/** Sheet facts of a sample, its glass transitions as measured, and what the instruments can run. */
export async function loadJudgeFacts(ports: Ports, rows: FitRows): Promise<JudgeFacts> {
  const { sample: _name, line: _line, ...said }: Partial<SampleSheetRow> = rows.sampleRow ?? {};
  const viscosity = await loadViscosities(ports, rows.sample.campaignId, rows.sample.sample);
  const glassTransitions = glassTransitionsOf(rows);
  const compositions =
    said.series === undefined || said.solventFraction === undefined
      ? []
      : await loadCompositions(ports, rows.sample.campaignId, said.series);
  return {
    facts: {
      ...said,
      ...(glassTransitions.length > 0 && { glassTransitions }),
      ...(viscosity.length > 0 && {
        viscosity: viscosity.map(({ temperatureK, log10PaS }) => ({ temperatureK, log10PaS })),
      }),
      ...(compositions.length > 0 && {
        compositions: compositions.map(({ series: _series, ...values }) => values),
      }),
    },
    ranges: (await loadBench(ports, rows.sample.campaignId)).ranges,
  };
}

/** Glass transitions seen on heating, from scans and from peaks.csv. */
function glassTransitionsOf({ scans, peaks }: FitRows): NonNullable<GlassFacts['glassTransitions']> {
  const ofScans = scans.flatMap(({ path, instrument, result }) => {
    const analysed = result?.segments.find((segment) => segment.segment === result.segment);
    if (result?.glassTransitionK === undefined || analysed?.kind !== 'heating') return [];
    return [{ file: path, instrument, rateKPerS: analysed.rateKPerS, temperatureK: result.glassTransitionK }];
  });
  const ofPeaks = peaks.flatMap(({ path, row }) =>
    row.glassTransitionK === undefined || row.rateKPerS <= 0
      ? []
      : [
          {
            file: `${path} line ${row.line}`,
            instrument: row.instrument,
            rateKPerS: row.rateKPerS,
            temperatureK: row.glassTransitionK,
          },
        ],
  );
  return [...ofScans, ...ofPeaks];
}

const VERSION = STEP_VERSIONS['judge-curvature'];

export const judgeKeyOf = (rows: FitRows, facts: JudgeFacts): string =>
  hashOf(['judge-curvature', VERSION, inputsKeyOf(rows), facts]);

const blobKeyOf = ({ sample }: FitRows, judgeKey: string) => judgementKey(sample.campaignId, judgeKey);

export const readStoredJudgement = (ports: Ports, rows: FitRows, judgeKey: string): Promise<JudgeResult | undefined> =>
  readDerived(ports, blobKeyOf(rows, judgeKey), decodePacked<JudgeResult>);

async function judgeRows(
  ports: Ports,
  rows: FitRows,
  { facts, ranges }: JudgeFacts,
  judgeKey: string,
): Promise<JudgeResult> {
  const { glassTransitions = [], ...others } = facts;
  const judged = await ports.compute.judgeCurvature({
    sample: rows.sample.sample,
    scans: (await loadFitScans(ports, rows)).scans,
    instruments: rows.calibrations,
    facts,
    ranges,
    // Paths of the glass transitions stay out, as they do everywhere in a seed.
    seed: hashOf([
      'judge-curvature',
      VERSION,
      seedOf(rows),
      others,
      ranges,
      glassTransitions.map(({ file: _file, ...values }) => values),
    ]),
    draws: FIT_DRAWS,
  });
  await ports.blobs.put(blobKeyOf(rows, judgeKey), encodePacked(judged));
  return judged;
}
