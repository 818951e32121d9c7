import type { Segment } from '../../schema/wire/reduced.ts';
import { median } from '../numeric/statistics.ts';

/** Blocks the programme is looked at in: fine enough for short holds, coarse enough for temperature noise. */
const BLOCKS = 240;
/** A block is a hold when its slope is below this fraction of the whole temperature span ÷ the whole time. */
const HOLD_FRACTION = 0.03;
/** A run that covers this part of the span is never too short: a fast ramp before a long hold takes few rows. */
const SPAN_PART = 0.2;
/** A ramp is split where its rate changes by this part, over runs as long as below. */
const RATE_CHANGE = 0.25;
/** Shorter runs than this many blocks belong to their neighbours (overshoot at a corner, noise). */
const SHORTEST_RUN = 5;

type Kind = Segment['kind'];

/**
 * Heating, cooling and hold segments of a temperature programme, numbered from 1 in time order; together they cover all rows.
 * @param timeS s, strictly increasing
 * @param temperatureK K, same length
 */
export function findSegments(timeS: Float64Array, temperatureK: Float64Array): Segment[] {
  const n = timeS.length;
  const size = Math.max(2, Math.floor(n / BLOCKS));
  const count = Math.max(1, Math.floor(n / size));
  const slopes = new Float64Array(count);
  for (let b = 0; b < count; b++) {
    const from = b * size;
    const to = b === count - 1 ? n : from + size;
    // Neighbours on both sides are taken in: three blocks' slope is quieter and corners move by less than a block.
    slopes[b] = slopeOf(timeS, temperatureK, Math.max(0, from - size), Math.min(n, to + size));
  }
  const block = (b: number) => temperatureK[Math.min(n - 1, b * size)];
  const levels = Float64Array.from({ length: count + 1 }, (_, b) => block(b)).sort();
  const spanK = levels[count] - levels[0];
  const usual = spanK / (timeS[n - 1] - timeS[0]);
  const kinds: Kind[] = Array.from(slopes, (s) =>
    Math.abs(s) <= HOLD_FRACTION * usual ? 'hold' : s > 0 ? 'heating' : 'cooling',
  );
  const covers = (run: Run) => Math.abs(block(run.to) - block(run.from)) > SPAN_PART * spanK;
  const runs = mergeShortRuns(kinds, covers).flatMap((run) => splitByRate(run, slopes));
  return runs.map((run, i) => {
    const from = run.from * size;
    const to = i === runs.length - 1 ? n : run.to * size;
    return {
      segment: i + 1,
      kind: run.kind,
      from,
      to,
      rateKPerS: slopeOf(timeS, temperatureK, from, to),
      startK: temperatureK[from],
      endK: temperatureK[to - 1],
    };
  });
}

interface Run {
  kind: Kind;
  from: number;
  to: number;
}

/** Splits a ramp once or more where the slope of its blocks jumps and stays; a slow drift of the rate is no jump. */
function splitByRate(run: Run, slopes: Float64Array): Run[] {
  const length = run.to - run.from;
  if (run.kind === 'hold' || length < 4 * SHORTEST_RUN) return [run];
  let best = { at: 0, change: 0 };
  for (let at = run.from + SHORTEST_RUN; at <= run.to - SHORTEST_RUN; at++) {
    // Slopes of blocks reach over their neighbours: two blocks at the corner are looked past.
    const before = medianOfFour(slopes, at - SHORTEST_RUN);
    const behind = medianOfFour(slopes, at + 1);
    const change = Math.abs(behind / before - 1);
    if (change > best.change) best = { at, change };
  }
  if (!(best.change > RATE_CHANGE)) return [run];
  const { at } = best;
  const sides = [
    { ...run, to: at },
    { ...run, from: at },
  ];
  const [before, behind] = sides.map((r) => median(slopes.subarray(r.from, r.to)));
  // Noise of a slow programme jumps back: only a change between the whole sides counts.
  if (Math.abs(behind / before - 1) < RATE_CHANGE) return [run];
  return sides.flatMap((side) => splitByRate(side, slopes));
}

/** Median of slopes [from, from + 4): twice a block, so without a sort. */
function medianOfFour(slopes: Float64Array, from: number): number {
  const [a, b, c, d] = [slopes[from], slopes[from + 1], slopes[from + 2], slopes[from + 3]];
  return (Math.max(Math.min(a, b), Math.min(c, d)) + Math.min(Math.max(a, b), Math.max(c, d))) / 2;
}

function mergeShortRuns(kinds: Kind[], covers: (run: Run) => boolean): Run[] {
  let runs: Run[] = [];
  for (let b = 0; b < kinds.length; b++) {
    const last = runs[runs.length - 1];
    if (last && last.kind === kinds[b]) last.to = b + 1;
    else runs.push({ kind: kinds[b], from: b, to: b + 1 });
  }
  const shortest = Math.min(SHORTEST_RUN, Math.ceil(kinds.length / 8));
  for (;;) {
    if (runs.length === 1) return runs;
    let at = -1;
    runs.forEach((run, i) => {
      if (run.to - run.from < shortest && !covers(run) && (at < 0 || run.to - run.from < runs[at].to - runs[at].from))
        at = i;
    });
    if (at < 0) return runs;
    const before = runs[at - 1];
    const after = runs[at + 1];
    const longer = !before
      ? after
      : !after
        ? before
        : before.to - before.from >= after.to - after.from
          ? before
          : after;
    runs[at].kind = longer.kind;
    const merged: Run[] = [];
    for (const run of runs) {
      const last = merged[merged.length - 1];
      if (last && last.kind === run.kind) last.to = run.to;
      else merged.push(run);
    }
    runs = merged;
  }
}

/** Least-squares slope dT/dt over rows [from, to), K/s. */
export function slopeOf(timeS: Float64Array, temperatureK: Float64Array, from: number, to: number): number {
  const t0 = timeS[from];
  const T0 = temperatureK[from];
  let st = 0;
  let sT = 0;
  let stt = 0;
  let stT = 0;
  const n = to - from;
  for (let i = from; i < to; i++) {
    const t = timeS[i] - t0;
    const T = temperatureK[i] - T0;
    st += t;
    sT += T;
    stt += t * t;
    stT += t * T;
  }
  const d = n * stt - st * st;
  return d > 0 ? (n * stT - st * sT) / d : 0;
}
