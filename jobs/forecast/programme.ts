import type { ProgrammeTable } from '../../schema/wire/forecasts.ts';
import { GAS_CONSTANT } from '../../schema/wire/units.ts';

/**
 * Time integrals of exp(g(T(t))) along a programme that is linear between its rows, by Gauss–Legendre panels. A panel is so short that the
 * exponent moves by at most z = `exponentSpan` over it. The rule's error for e^z is z^2m (m!)⁴/((2m+1) ((2m)!)³) of the panel (Abramowitz & Stegun
 * 25.4.30): with three nodes 4e-10 for z = 0.3, and 5e-7 for z = 1, which is enough for a draw.
 */
export interface Panels {
  name: string;
  endS: number;
  endK: number;
  /** Start and length in time, s, temperatures at both ends, K: one a panel */
  startS: Float64Array;
  lengthS: Float64Array;
  /** Time that the integral counts, s: the length, but for blocks that stand for many panels */
  weightS: Float64Array;
  fromK: Float64Array;
  toK: Float64Array;
  rule: GaussRule;
  /** Temperatures at the nodes, panel-major, K */
  nodeK: Float64Array;
}

export interface GaussRule {
  /** on 0 … 1 */
  nodes: readonly number[];
  weights: readonly number[];
  exponentSpan: number;
}

/** Abramowitz & Stegun 1964, table 25.4, moved to 0 … 1. */
const THREE_NODES = {
  nodes: [0.5, 0.5 + Math.sqrt(0.6) / 2, 0.5 - Math.sqrt(0.6) / 2],
  weights: [4 / 9, 5 / 18, 5 / 18],
} as const;
export const FINE: GaussRule = { ...THREE_NODES, exponentSpan: 0.3 };
export const COARSE: GaussRule = { ...THREE_NODES, exponentSpan: 1 };

/** Most panels of one programme: a table that needs more is refused rather than left to run for minutes. */
const MOST_PANELS = 2_000_000;

/** @throws RangeError for a table that is no programme, with the row (counted from 1) */
export function checkProgramme({ name, timeS, temperatureK }: ProgrammeTable): void {
  const what = name === '' ? 'the programme' : `the programme ${name}`;
  if (timeS.length !== temperatureK.length || timeS.length < 2)
    throw new RangeError(`${what} has ${timeS.length} rows; at least 2 with a time and a temperature each are needed`);
  for (let i = 0; i < timeS.length; i++) {
    if (!(temperatureK[i] > 0 && temperatureK[i] < 1e4))
      throw new RangeError(`${what}, row ${i + 1}: temperature not in 0 … 10 000 K: ${temperatureK[i]} K`);
    if (!Number.isFinite(timeS[i]) || (i > 0 && !(timeS[i] > timeS[i - 1])))
      throw new RangeError(`${what}, row ${i + 1}: time ${timeS[i]} s does not come after ${timeS[i - 1]} s`);
  }
}

/** @param steepness J/mol, as of a RateCurve; the larger of a stretch's two ends counts */
export function layPanels(
  programme: ProgrammeTable,
  steepness: (temperatureK: number) => number,
  breaksK: readonly number[],
  rule: GaussRule,
): Panels {
  checkProgramme(programme);
  const { knotS, knotK } = knotsOf(programme, breaksK);
  // The ends of a stretch are those of its neighbours: each is asked once.
  const counts = new Uint32Array(knotS.length - 1);
  let count = 0;
  let steepHere = steepness(knotK[0]);
  for (let s = 0; s < counts.length; s++) {
    const steepNext = steepness(knotK[s + 1]);
    const span = (Math.max(steepHere, steepNext) / GAS_CONSTANT) * Math.abs(1 / knotK[s] - 1 / knotK[s + 1]);
    steepHere = steepNext;
    const wanted = Math.max(1, Math.ceil(span / rule.exponentSpan));
    count += wanted;
    if (!(count <= MOST_PANELS))
      throw new RangeError(
        `the programme ${programme.name} needs more than ${MOST_PANELS} panels of integration; give it fewer rows`,
      );
    counts[s] = wanted;
  }
  const { nodes } = rule;
  const m = nodes.length;
  const lengthS = new Float64Array(count);
  const out: Panels = {
    name: programme.name,
    endS: knotS[counts.length],
    endK: knotK[counts.length],
    startS: new Float64Array(count),
    lengthS,
    weightS: lengthS,
    fromK: new Float64Array(count),
    toK: new Float64Array(count),
    rule,
    nodeK: new Float64Array(count * m),
  };
  let p = 0;
  for (let s = 0; s < counts.length; s++) {
    const [t, T] = [knotS[s], knotK[s]];
    const [dt, dT] = [(knotS[s + 1] - t) / counts[s], (knotK[s + 1] - T) / counts[s]];
    for (let k = 0; k < counts[s]; k++, p++) {
      out.startS[p] = t + k * dt;
      lengthS[p] = dt;
      out.fromK[p] = T + k * dT;
      out.toK[p] = T + (k + 1) * dT;
      for (let q = 0; q < m; q++) out.nodeK[p * m + q] = T + (k + nodes[q]) * dT;
    }
  }
  return out;
}

/** The rows of a programme, s after its first and K, with those places between them where the law changes its form. */
function knotsOf({ timeS, temperatureK }: ProgrammeTable, breaksK: readonly number[]) {
  const rising = [...new Set(breaksK)].sort((a, b) => a - b);
  const falling = [...rising].reverse();
  const knotS = [0];
  const knotK = [temperatureK[0]];
  for (let i = 1; i < timeS.length; i++) {
    const [t1, t2] = [timeS[i - 1] - timeS[0], timeS[i] - timeS[0]];
    const [T1, T2] = [temperatureK[i - 1], temperatureK[i]];
    const [low, high] = T1 < T2 ? [T1, T2] : [T2, T1];
    for (const T of T2 > T1 ? rising : falling) {
      if (!(T > low && T < high)) continue;
      const t = t1 + ((T - T1) / (T2 - T1)) * (t2 - t1);
      if (!(t > knotS[knotS.length - 1] && t < t2)) continue;
      knotS.push(t);
      knotK.push(T);
    }
    knotS.push(t2);
    knotK.push(T2);
  }
  return { knotS, knotK };
}

/** ∫ K dt from the start to the end of each panel, all divided by e^lnScale so that nothing under- or overflows. */
export interface Accumulated {
  lnScale: number;
  /** one a panel, ascending */
  sums: Float64Array;
}

export function accumulate(panels: Panels, lnRate: (temperatureK: number) => number): Accumulated {
  const { nodes, weights } = panels.rule;
  const m = nodes.length;
  const { nodeK, weightS } = panels;
  const values = new Float64Array(nodeK.length);
  let lnScale = Number.NEGATIVE_INFINITY;
  for (let i = 0; i < values.length; i++) {
    const v = lnRate(nodeK[i]);
    values[i] = v;
    if (v > lnScale) lnScale = v;
  }
  const sums = new Float64Array(weightS.length);
  if (lnScale === Number.NEGATIVE_INFINITY) return { lnScale, sums };
  let sum = 0;
  for (let p = 0; p < sums.length; p++) {
    let mean = 0;
    for (let k = 0; k < m; k++) mean += weights[k] * Math.exp(values[p * m + k] - lnScale);
    sum += weightS[p] * mean;
    sums[p] = sum;
  }
  return { lnScale, sums };
}

/** ln ∫ K dt over the whole programme; −∞ where K is 0 throughout. */
export function lnIntegral({ lnScale, sums }: Accumulated): number {
  return lnScale + Math.log(sums[sums.length - 1]);
}

/** The same without the sums on the way, in one pass that moves the scale up as it meets larger rates. */
export function lnIntegralAlong(panels: Panels, lnRate: (temperatureK: number) => number): number {
  const { nodeK, weightS, rule } = panels;
  const { weights } = rule;
  const m = weights.length;
  let lnScale = Number.NEGATIVE_INFINITY;
  let sum = 0;
  for (let p = 0; p < weightS.length; p++) {
    for (let k = 0; k < m; k++) {
      const v = lnRate(nodeK[p * m + k]);
      const w = weightS[p] * weights[k];
      if (v <= lnScale) {
        // −∞ − −∞ is no number: nothing is added while the rate is nothing.
        if (v !== Number.NEGATIVE_INFINITY) sum += w * Math.exp(v - lnScale);
      } else {
        sum = (lnScale === Number.NEGATIVE_INFINITY ? 0 : sum * Math.exp(lnScale - v)) + w;
        lnScale = v;
      }
    }
  }
  return lnScale + Math.log(sum);
}

/**
 * Time at which ∫ K dt reaches e^lnTarget, s from the start. Behind its end the programme is taken to stay at its last temperature, so that
 * the answer is a smooth function of the law; the caller compares with `endS`. +∞ where K is 0 there.
 */
export function timeOfIntegral(
  panels: Panels,
  done: Accumulated,
  lnRate: (temperatureK: number) => number,
  lnTarget: number,
): number {
  const target = Math.exp(lnTarget - done.lnScale);
  const { sums } = done;
  const last = sums.length - 1;
  if (!(sums[last] >= target)) {
    if (done.lnScale === Number.NEGATIVE_INFINITY) return Number.POSITIVE_INFINITY;
    return panels.endS + (target - sums[last]) * Math.exp(done.lnScale - lnRate(panels.endK));
  }
  let low = 0;
  let high = last;
  while (low < high) {
    const middle = (low + high) >> 1;
    if (sums[middle] >= target) high = middle;
    else low = middle + 1;
  }
  const before = low === 0 ? 0 : sums[low - 1];
  const u = partOfPanel(panels, low, (T) => Math.exp(lnRate(T) - done.lnScale), target - before);
  return panels.startS[low] + u * panels.lengthS[low];
}

/** Part u of panel p over which ∫ rate dt reaches `target` (Newton with a bracket; the integral of a part is again a Gauss sum). */
export function partOfPanel(
  panels: Panels,
  p: number,
  rate: (temperatureK: number) => number,
  target: number,
  from = 0,
): number {
  const { nodes, weights } = panels.rule;
  const T1 = panels.fromK[p];
  const dT = panels.toK[p] - T1;
  const length = panels.weightS[p];
  let [low, high] = [from, 1];
  let u = (from + 1) / 2;
  for (let i = 0; i < 60; i++) {
    let sum = 0;
    for (let k = 0; k < nodes.length; k++) sum += weights[k] * rate(T1 + dT * (from + (u - from) * nodes[k]));
    const excess = sum * (u - from) * length - target;
    if (excess > 0) high = u;
    else low = u;
    const slope = rate(T1 + dT * u) * length;
    let next = u - excess / slope;
    if (!(next > low && next < high)) next = (low + high) / 2;
    if (Math.abs(next - u) <= 1e-13 * Math.max(u, 1e-3) || high - low < 1e-15) return next;
    u = next;
  }
  return u;
}
