/** Finds where a signal sits at the end of its range while the rows around it vary. */

/** Fewest equal rows in succession (clipped signals). */
const SHORTEST_RUN = 5;
/** Rows looked at on either side of a run. */
const NEIGHBOURS = 5;
/** A signal with fewer steps over its range than this is coarse, and equal rows mean nothing. */
const FEWEST_LEVELS = 20;

export interface ClippedRun {
  at: 'maximum' | 'minimum';
  value: number;
  length: number;
  /** Rows [from, to) of the longest run at this value */
  from: number;
  to: number;
}

/** The longest run at the maximum and at the minimum, where it is one of clipping; `length` sums all such runs there. */
export function clippedRuns(signal: Float64Array): ClippedRun[] {
  let maximum = signal[0];
  let minimum = signal[0];
  let smallestStep = Number.POSITIVE_INFINITY;
  let before = signal[0];
  let run = 1;
  let longest = 1;
  for (let i = 1; i < signal.length; i++) {
    const value = signal[i];
    if (value === before) {
      if (++run > longest) longest = run;
      continue;
    }
    run = 1;
    if (value > maximum) maximum = value;
    else if (value < minimum) minimum = value;
    const step = value > before ? value - before : before - value;
    if (step < smallestStep) smallestStep = step;
    before = value;
  }
  if (longest < SHORTEST_RUN) return [];
  if (!(maximum - minimum >= FEWEST_LEVELS * smallestStep)) return [];
  return [longestRun(signal, 'maximum', maximum), longestRun(signal, 'minimum', minimum)].filter(
    (run) => run !== undefined,
  );
}

function longestRun(signal: Float64Array, at: ClippedRun['at'], value: number): ClippedRun | undefined {
  let best: ClippedRun | undefined;
  let rows = 0;
  for (let i = 0; i < signal.length; i++) {
    if (signal[i] !== value) continue;
    const from = i;
    while (i < signal.length && signal[i] === value) i++;
    if (i - from < SHORTEST_RUN || !neighboursVary(signal, from, i)) continue;
    rows += i - from;
    if (best === undefined || i - from > best.to - best.from) best = { at, value, length: 0, from, to: i };
  }
  return best === undefined ? undefined : { ...best, length: rows };
}

/** More than half of the steps beside the run are not zero. */
function neighboursVary(signal: Float64Array, from: number, to: number): boolean {
  let steps = 0;
  let moving = 0;
  for (const [first, last] of [
    [Math.max(0, from - NEIGHBOURS), from - 1],
    [to, Math.min(signal.length, to + NEIGHBOURS) - 1],
  ])
    for (let i = first; i < last; i++) {
      steps++;
      if (signal[i] !== signal[i + 1]) moving++;
    }
  return moving * 2 > steps;
}
