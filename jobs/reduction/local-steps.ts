/**
 * Steps of a signal whose baseline no polynomial over the whole ramp describes: looked for in short windows of many lengths. In each a
 * logistic step between two parallel straight lines, as ISO 11357-2 draws a glass transition, stands against a cubic without a step.
 */
export interface LocalStep {
  middleS: number;
  /** of the logistic, s */
  scaleS: number;
  /** signal units, positive; endothermic */
  height: number;
  /** What step and lines leave ÷ what the cubic leaves, root mean squares */
  ratio: number;
  /** Rows of the window */
  fromS: number;
  toS: number;
}

export interface LocalFindings {
  /** The step that stands out; missing where none does, or several do alike */
  step?: LocalStep;
  /** Steps that nothing tells apart, or that the baseline drifts by as much as they rise, clearest first */
  doubtful: LocalStep[];
  why?: 'alike' | 'drift';
}

/** Bins a logistic width, and bins of a window on either side of its middle: 6.7 widths. */
const PER_SCALE = 3;
const HALF = 20;
const WINDOW = 2 * HALF + 1;
/** A step must stand this many errors out of noise, … */
const LEAST_SIGMAS = 7;
/** … leave this part of what a cubic leaves, … */
const MOST_RATIO = 0.9;
/** … be higher than the lines beside it rise or fall while it goes from 10 to 90 %, which are this many widths, … */
export const STEEP_WIDTHS = 4.4;
/** … and be no small one beside another. */
const LEAST_PART = 0.3;
/** Two steps are alike when the weight of one, height × (1 − ratio), is above this part of the other's. */
const ALIKE = 0.6;

const polynomials = orthonormal(
  [0, 1, 2, 3].map((k) => Float64Array.from({ length: WINDOW }, (_, i) => (i - HALF) ** k)),
);
/** Where nothing follows, a step may stand this many bins before the end of the rows. */
const NEAREST_END = 10;
/** For a step at each bin of a window: the logistic beside a straight line, of length 1; the length it had, and its own slope. */
const shapes = Array.from({ length: WINDOW }, (_, middle) => {
  const logistic = Float64Array.from({ length: WINDOW }, (_, i) => 1 / (1 + Math.exp((middle - i) / PER_SCALE)));
  const [, , beside] = orthonormal([polynomials[0], polynomials[1], logistic]);
  return { beside, size: dot(beside, logistic), ownSlope: dot(polynomials[1], logistic) };
});
/** Of the straight line, a bin. */
const slopeOfLine = polynomials[1][1] - polynomials[1][0];

/**
 * @param noise of one row   @param scalesS of the logistic that are tried, s
 * @param openEnd the rows end with the ramp, not before an event
 * @returns endothermic steps (exotherm up) in rows [from, to)
 */
export function findLocalStep(
  t: Float64Array,
  y: Float64Array,
  from: number,
  to: number,
  noise: number,
  scalesS: readonly number[],
  openEnd: boolean,
): LocalFindings {
  const clear: LocalStep[] = [];
  const drifting: LocalStep[] = [];
  const rowS = (t[to - 1] - t[from]) / (to - 1 - from);
  for (const scaleS of scalesS) {
    const binS = scaleS / PER_SCALE;
    const count = Math.floor((t[to - 1] - t[from]) / binS);
    if (binS < rowS || count < WINDOW) continue;
    const bins = evenBins(t, y, from, binS, count);
    const variance = (noise ** 2 * rowS) / binS;
    for (let at = 0; at + WINDOW <= count; at++) {
      const last = openEnd && at + WINDOW === count ? WINDOW - 1 - NEAREST_END : HALF;
      for (let middle = HALF; middle <= last; middle++) {
        const found = stepInWindow(bins, at, middle, variance);
        if (!found) continue;
        const middleS = t[from] + (at + middle + 0.5) * binS;
        const step = { middleS, scaleS, ...found, fromS: t[from] + at * binS, toS: t[from] + (at + WINDOW) * binS };
        (found.height > STEEP_WIDTHS * PER_SCALE * Math.abs(found.slope) ? clear : drifting).push(step);
      }
    }
  }
  const stood = separate(clear);
  if (stood.length === 0) return { doubtful: separate(drifting), why: 'drift' };
  const [best, second] = stood;
  if (second && weight(second) > ALIKE * weight(best)) return { doubtful: stood, why: 'alike' };
  return { step: best, doubtful: [] };
}

const weight = ({ height, ratio }: LocalStep): number => height * (1 - ratio);

/** The heaviest step of each place, heaviest first. */
function separate(steps: LocalStep[]): LocalStep[] {
  const out: LocalStep[] = [];
  for (const step of steps.sort((a, b) => weight(b) - weight(a))) {
    if (step.height < LEAST_PART * (out[0]?.height ?? 0)) continue;
    const apart = (o: LocalStep) => Math.abs(o.middleS - step.middleS) > STEEP_WIDTHS * Math.max(o.scaleS, step.scaleS);
    if (out.every(apart)) out.push(step);
  }
  return out;
}

/** An endothermic step at bin `middle` of the window that begins at bin `at`, and the slope of the lines a bin. */
function stepInWindow(bins: Float64Array, at: number, middle: number, variance: number) {
  const { beside, size, ownSlope } = shapes[middle];
  const level = bins[at + middle];
  let along = 0;
  for (let i = 0; i < WINDOW; i++) along += (bins[at + i] - level) * beside[i];
  if (!(along < 0 && along ** 2 > LEAST_SIGMAS ** 2 * variance)) return undefined;
  let squares = 0;
  const d = [0, 0, 0, 0];
  for (let i = 0; i < WINDOW; i++) {
    const v = bins[at + i] - level;
    squares += v * v;
    for (let k = 0; k < 4; k++) d[k] += v * polynomials[k][i];
  }
  const line = squares - d[0] ** 2 - d[1] ** 2;
  const floor = variance / 10;
  const ratio = Math.sqrt(
    (Math.max(0, line - along ** 2) + floor) / (Math.max(0, line - d[2] ** 2 - d[3] ** 2) + floor),
  );
  if (!(ratio < MOST_RATIO)) return undefined;
  const height = -along / size;
  return { height, ratio, slope: (d[1] + height * ownSlope) * slopeOfLine };
}

/** Means over even stretches of time; an empty one takes the row before it. */
function evenBins(t: Float64Array, y: Float64Array, from: number, binS: number, count: number): Float64Array {
  const out = new Float64Array(count);
  let i = from;
  for (let b = 0; b < count; b++) {
    const end = t[from] + (b + 1) * binS;
    let sum = 0;
    let rows = 0;
    for (; t[i] < end; i++, rows++) sum += y[i];
    out[b] = rows > 0 ? sum / rows : y[Math.max(from, i - 1)];
  }
  return out;
}

function orthonormal(columns: Float64Array[]): Float64Array[] {
  const out: Float64Array[] = [];
  for (const column of columns) {
    const c = Float64Array.from(column);
    for (const known of out) {
      const along = dot(c, known);
      for (let i = 0; i < c.length; i++) c[i] -= along * known[i];
    }
    const norm = Math.sqrt(dot(c, c));
    out.push(c.map((v) => v / norm));
  }
  return out;
}

function dot(a: Float64Array, b: Float64Array): number {
  let sum = 0;
  for (let i = 0; i < a.length; i++) sum += a[i] * b[i];
  return sum;
}
