import type { Estimates } from './estimate.ts';
import { CONVERSION_COUNT, POOLED } from './event-data.ts';
import type { FurtherEstimates } from './further-estimates.ts';

const PEAK = [
  'kissinger',
  'kissingerLnPrefactor',
  'boswell',
  'ozawaFlynnWall',
  'augisBennett',
  'augisBennettExponent',
] as const;
const JMAK = ['energy', 'lnPrefactor', 'exponent'] as const;
const CURVE = ['friedman', 'kissingerAkahiraSunose', 'starink', 'ozawaFlynnWallCurve', 'vyazovkin'] as const;
const FURTHER = ['friedmanLnPrefactor', 'ozawaExponent'] as const;
const SESTAK_BERGGREN = ['energy', 'lnPrefactor', 'm', 'n'] as const;

type Columns<Name extends string> = Record<Name, Float64Array>;

/**
 * What the draws gave: one column a number, in the order of the draws. Curve columns hold one conversion after the other (`atConversion`).
 * A number that a draw did not give is NaN.
 */
export class DrawnColumns {
  readonly peak: Columns<(typeof PEAK)[number]>;
  readonly jmak: Columns<(typeof JMAK)[number]>;
  readonly curve: Columns<(typeof CURVE)[number] | 'vyazovkinLinear' | 'lnStep'>;
  readonly further: Columns<(typeof FURTHER)[number]>;
  readonly matusitaSakka: Columns<'exponent' | 'scaledEnergy'>;
  readonly sestakBerggren: Columns<(typeof SESTAK_BERGGREN)[number]>;

  constructor(readonly draws: number) {
    const columns = <Name extends string>(names: readonly Name[], size = 1) =>
      Object.fromEntries(names.map((name) => [name, new Float64Array(draws * size).fill(Number.NaN)])) as Columns<Name>;
    this.peak = columns(PEAK);
    this.jmak = columns(JMAK);
    this.curve = columns([...CURVE, 'vyazovkinLinear', 'lnStep'], CONVERSION_COUNT);
    this.further = columns(FURTHER);
    this.matusitaSakka = columns(['exponent', 'scaledEnergy']);
    this.sestakBerggren = columns(SESTAK_BERGGREN);
  }

  /** Keeps what draw `d` gave. */
  keep(d: number, main: Estimates, further: FurtherEstimates | undefined): void {
    for (const name of PEAK) this.peak[name][d] = main[name];
    if (!further) return;
    if (main.jmak) for (const name of JMAK) this.jmak[name][d] = main.jmak[name];
    for (const name of CURVE) this.keepCurve(this.curve[name], d, main[name]);
    this.keepCurve(this.curve.lnStep, d, main.lnStep);
    this.keepCurve(this.curve.vyazovkinLinear, d, further.vyazovkinLinear);
    for (const name of FURTHER) this.further[name][d] = further[name];
    this.matusitaSakka.exponent[d] = further.matusitaSakka.exponent;
    this.matusitaSakka.scaledEnergy[d] = further.matusitaSakka.scaledEnergy;
    const shape = further.sestakBerggren;
    if (shape) for (const name of SESTAK_BERGGREN) this.sestakBerggren[name][d] = shape[name];
  }

  private keepCurve(column: Float64Array, d: number, values: Float64Array): void {
    for (let k = 0; k < CONVERSION_COUNT; k++) column[k * this.draws + d] = values[k];
  }

  /** The part of a curve column at one conversion. */
  atConversion(column: Float64Array, k: number): Float64Array {
    return column.subarray(k * this.draws, (k + 1) * this.draws);
  }

  /** Of each draw the mean over the pooled conversions that are determined, as `pooledMean`. */
  pooled(column: Float64Array, determined: ArrayLike<boolean>): Float64Array {
    const sum = new Float64Array(this.draws);
    let count = 0;
    for (let k = POOLED.from; k < POOLED.to; k++) {
      if (!determined[k]) continue;
      const at = this.atConversion(column, k);
      for (let d = 0; d < sum.length; d++) sum[d] += at[d];
      count++;
    }
    return sum.map((v) => v / count);
  }

  /** A curve column draw by draw, one value a conversion. */
  byDraw(column: Float64Array): Float64Array {
    const out = new Float64Array(column.length);
    for (let k = 0; k < CONVERSION_COUNT; k++) {
      for (let d = 0; d < this.draws; d++) out[d * CONVERSION_COUNT + k] = column[k * this.draws + d];
    }
    return out;
  }
}
