import type { DecidingScan, InstrumentRange } from '../../../schema/wire/verdicts.ts';
import { studentQuantile } from '../../numeric/distributions.ts';
import type { BendAnalysis } from './analyse.ts';
import type { ConditionValue } from './condition.ts';
import { decidingHalfWidth } from './decide.ts';

const PER_DECADE = 6;
/** More scans than this are not advised at once. */
const MOST_SCANS = 8;
/** The interval should come out narrower than needed by this factor: it depends on what the new scans turn out to be. */
const MARGIN = 0.8;

export interface Advice {
  deciding: DecidingScan[];
  halfWidthNow: number;
  halfWidthExpected: number;
}

/**
 * Which scans shrink the bend's interval most: one row more in the linearised fit, the best of a grid of rates on every instrument, again
 * and again until the interval is expected to decide.
 * @param instruments names, in the order of the fit
 */
export function adviseScans(a: BendAnalysis, instruments: string[], ranges: InstrumentRange[]): Advice {
  const { full, span } = a;
  const { layout } = full;
  const { p } = layout;
  const C = Float64Array.from(full.inverse ?? new Float64Array(p * p));
  const inflate = a.inflation;
  const goal99 = Math.abs(a.bend) >= decidingHalfWidth(a.bend) - 1e-12;
  const candidates = candidateRows(a, instruments, ranges);
  const picked: { instrument: string; rateKPerS: number }[] = [];
  const width = (added: number) => studentQuantile(0.995, a.degrees + added) * inflate * Math.sqrt(C[2 * p + 2]) * span;
  // A bend near 0 is decided by the narrower 95 % interval, one far from 0 by the 99 % one.
  const enough = (added: number) =>
    goal99
      ? width(added) < MARGIN * decidingHalfWidth(a.bend)
      : (width(added) * studentQuantile(0.975, a.degrees + added)) / studentQuantile(0.995, a.degrees + added) <
        MARGIN * decidingHalfWidth(a.bend);
  while (picked.length < MOST_SCANS && (picked.length === 0 || !enough(picked.length))) {
    let best: (typeof candidates)[number] | undefined;
    let gain = 0;
    for (const c of candidates) {
      const [cross, own] = project(C, c.row, p, layout.bend);
      const g = (cross * cross) / (c.variance + own);
      if (g > gain) {
        gain = g;
        best = c;
      }
    }
    if (!best) break;
    addRow(C, best.row, best.variance, p);
    picked.push({ instrument: best.instrument, rateKPerS: best.rateKPerS });
  }
  const deciding: DecidingScan[] = [];
  for (const { instrument, rateKPerS } of picked) {
    const same = deciding.find((x) => x.instrument === instrument && x.rateKPerS === rateKPerS);
    if (same) same.scans++;
    else deciding.push({ instrument, rateKPerS, scans: 1 });
  }
  return { deciding, halfWidthNow: a.halfWidth99, halfWidthExpected: width(picked.length) };
}

/** Two significant digits: a rate someone would set. */
const rounded = (rate: number): number => Number(rate.toPrecision(2));

function candidateRows({ data: d, full, scatter }: BendAnalysis, instruments: string[], ranges: InstrumentRange[]) {
  const { layout } = full;
  const { p } = layout;
  const at: ConditionValue = { value: 0, byTemperature: 0, byLogEnergy: 0, byBend: 0 };
  const out: { instrument: string; rateKPerS: number; row: Float64Array; variance: number }[] = [];
  const slowest = d.rate.indexOf(Math.min(...d.rate));
  instruments.forEach((instrument, j) => {
    const range = ranges.find((r) => r.instrument === instrument);
    if (!range) return;
    const steps = Math.max(1, Math.round(Math.log10(range.rateMaxKPerS / range.rateMinKPerS) * PER_DECADE));
    for (let k = 0; k <= steps; k++) {
      const rate = rounded(range.rateMinKPerS * (range.rateMaxKPerS / range.rateMinKPerS) ** (k / steps));
      const state = layout.state >= 0 && j > 0 ? layout.state + j - 1 : -1;
      const lnK0 = full.lnK0 + (state >= 0 ? full.parameters[state] : 0);
      const T = d.condition.solve(Math.log(rate), d.temperatureK[slowest], lnK0, full.lnEnergy, full.q, d.scale, at);
      if (!(T > 0) || !(at.byTemperature > 0)) continue;
      const row = new Float64Array(p);
      const per = -1 / at.byTemperature;
      row[0] = per;
      row[1] = per * at.byLogEnergy;
      row[2] = per * at.byBend;
      row[layout.offset + j] = 1;
      if (layout.lag[j] >= 0) row[layout.lag[j]] = rate / d.topRate[j];
      if (state >= 0) row[state] = per;
      out.push({ instrument, rateKPerS: rate, row, variance: variancesNear(d, j, rate) ?? scatter.varianceK2[j] });
    }
  });
  return out;
}

/** Variance of the instrument's scan nearest in rate; it grows with the width of the event. */
function variancesNear(d: BendAnalysis['data'], j: number, rate: number): number | undefined {
  let best: number | undefined;
  let near = Number.POSITIVE_INFINITY;
  for (let i = 0; i < d.n; i++) {
    const far = Math.abs(Math.log(d.rate[i] / rate));
    if (d.instrument[i] === j && far < near) {
      near = far;
      best = d.variance[i];
    }
  }
  return best;
}

/** (row C e_at, row C rowᵀ) */
function project(C: Float64Array, row: Float64Array, p: number, at: number): [number, number] {
  let cross = 0;
  let own = 0;
  for (let x = 0; x < p; x++) {
    if (row[x] === 0) continue;
    cross += row[x] * C[x * p + at];
    for (let y = 0; y < p; y++) own += row[x] * C[x * p + y] * row[y];
  }
  return [cross, own];
}

/** C after one more row (Sherman & Morrison 1950). */
function addRow(C: Float64Array, row: Float64Array, variance: number, p: number): void {
  const v = new Float64Array(p);
  for (let x = 0; x < p; x++) for (let y = 0; y < p; y++) v[x] += C[x * p + y] * row[y];
  let own = variance;
  for (let x = 0; x < p; x++) own += row[x] * v[x];
  for (let x = 0; x < p; x++) for (let y = 0; y < p; y++) C[x * p + y] -= (v[x] * v[y]) / own;
}
