import { sweepCrashes } from '../fault/crash-sweep.ts';
import { remoteOutage } from '../fault/outage.ts';
import { soak } from '../fault/soak.ts';
import { compareHomes, compareTables } from '../runtime/demo-parity.ts';
import type { StudyOptions } from './registry.ts';
import { markdownTable, quantile } from './table.ts';

/** Every write of a small campaign as a kill point, or `count` of them spread evenly. */
export async function crashStudy({ count }: StudyOptions): Promise<string> {
  const every = count === undefined ? 1 : Math.max(1, Math.floor(WRITES_ABOUT / count));
  const { tried, writes, wrong } = await sweepCrashes({ every });
  return [
    markdownTable(
      ['kill points tried', 'writes of a run that survives', 'wrong after a restart'],
      [[String(tried), String(writes), String(wrong.length)]],
    ),
    ...wrong,
  ].join('\n');
}

/** Writes of the campaign of the sweep, about. */
const WRITES_ABOUT = 600;

const SCANS_EACH = 50;

const atQuantiles = (values: readonly number[]): string =>
  [0.5, 0.95, 0.99].map((share) => quantile(values, share).toFixed(1)).join(', ');

/** 5 000 scans in 100 campaigns unless `count` gives another number of campaigns. */
export async function soakStudy({ count = 100, seed }: StudyOptions): Promise<string> {
  const result = await soak({ campaigns: count, scansEach: SCANS_EACH, seed, limitS: 1_800 });
  const { scans, campaigns, doubled, cutOff, kills, uploadS, settledS, readsMs, uploadsMs, wrong } = result;
  const rows = [
    ['scans in campaigns', `${scans} in ${campaigns}`],
    ['deliveries doubled, cut off', `${doubled}, ${cutOff}`],
    ['workers killed', String(kills)],
    ['scans a second taken in, settled', `${(scans / uploadS).toFixed(0)}, ${(scans / settledS).toFixed(0)}`],
    ['reads: p50, p95, p99 (ms)', atQuantiles(readsMs)],
    ['uploads: p50, p95, p99 (ms)', atQuantiles(uploadsMs)],
    ['wrong', String(wrong.length)],
  ];
  return [markdownTable(['', ''], rows), ...wrong].join('\n');
}

const ONE_MINUTE_S = 60;

/** A remote database that is gone for `count` seconds of real time, a minute unless told otherwise. */
export async function outageStudy({ count = ONE_MINUTE_S }: StudyOptions): Promise<string> {
  const found = await remoteOutage(count);
  const { goneS, recoveryS, jobs, mostAttempts, failed, resent, otherLines } = found;
  const rows = [
    ['database gone for (s)', goneS.toFixed(1)],
    ['settled after it was back (s)', recoveryS.toFixed(1)],
    ['jobs, most attempts at one, failed', `${jobs}, ${mostAttempts}, ${failed}`],
    ['uploads sent again', String(resent)],
    ['tables as without an outage, byte for byte', otherLines.length === 0 ? 'yes' : 'NO'],
  ];
  const said = (what: ReadonlyMap<string, number>) => [...what].map(([text, times]) => [text, String(times)]);
  return [
    markdownTable(['', ''], rows),
    markdownTable(['answers meanwhile', 'times'], said(found.answers)),
    markdownTable(['log', 'times'], said(found.log)),
    ...otherLines,
  ].join('\n\n');
}

/** The demo campaign through the real serverless runtime beside Node. */
export async function serverlessStudy(): Promise<string> {
  const found = await compareHomes(1_200);
  const { cells, differing, otherText, worstRelative } = compareTables(found.node, found.serverless);
  const cpuOf = (step: string) => {
    const cpu = found.nodeCpu.find((one) => one.step === step);
    return cpu ? [cpu.meanMs.toFixed(0), cpu.longestMs.toFixed(0)] : ['', ''];
  };
  const { isolate } = found;
  const steps = found.steps.map(({ step, count, meanMs, longestMs }) => [
    step,
    String(count),
    meanMs.toFixed(0),
    longestMs.toFixed(0),
    ...cpuOf(step),
  ]);
  return [
    markdownTable(
      ['cells of parameters.csv', 'with other text', 'of these no numbers', 'largest relative difference'],
      [[String(cells), String(differing), String(otherText), worstRelative.toExponential(1)]],
    ),
    markdownTable(['step', 'count', 'mean (ms)', 'longest (ms)', 'CPU on Node, mean (ms)', 'longest (ms)'], steps),
    markdownTable(
      ['isolate idle (MB)', 'in use at most', 'above idle', 'held from the system at most', 'looks'],
      [
        [
          isolate.idleMb.toFixed(1),
          isolate.usedMb.toFixed(1),
          (isolate.usedMb - isolate.idleMb).toFixed(1),
          isolate.heldMb.toFixed(1),
          String(isolate.looks),
        ],
      ],
    ),
    markdownTable(
      [
        'whole process idle (MB)',
        'highest (MB, local bucket and queue included)',
        'CPU in all (s)',
        'requests to the database',
      ],
      [[found.idleMb.toFixed(0), found.peakMb.toFixed(0), found.cpuS.toFixed(1), String(found.databaseRequests)]],
    ),
  ].join('\n\n');
}
