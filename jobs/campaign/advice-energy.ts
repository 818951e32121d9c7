import { GAS_CONSTANT } from '../../schema/wire/units.ts';
import { CONVERSION_COUNT, type EventData } from '../kinetics/event-data.ts';
import type { Scatter } from '../kinetics/monte-carlo.ts';
import { studentQuantile } from '../numeric/distributions.ts';
import { solveSymmetric } from '../numeric/linear-solve.ts';
import type { Candidate } from './advice-candidates.ts';

/** Index of α = 0.5 in the isoconversional table. */
const HALF = 9;
/** Normal quantile 0.975, for errors whose size is given. */
const NORMAL = 1.959964;

/** A scan to come with the temperature expected of it, K. */
export type ExpectedScan = Candidate & { temperatureK: number };

/**
 * The 95 % width of E at α = 0.5, J/mol, by the linearised covariance of the fit that reports it: a line of ln β against 1/T with weights 1/σ² by
 * instrument; every scan's own scatter, and the offset and lag of each instrument shared by its scans. As in the interval shown, calibration errors, whose
 * size is given, count with the normal quantile and each instrument's scatter with Student's t on the degrees of freedom behind it.
 */
export class EnergyPrecision {
  private readonly n: number;
  private readonly instruments: number;
  private readonly x: Float64Array;
  private readonly weight: Float64Array;
  private readonly varianceK2: Float64Array;
  /** Σ(1 − leverage) of each instrument's scans under the trend, as it is now */
  private readonly ownDegrees: Float64Array;

  constructor(
    private readonly data: EventData,
    private readonly model: Scatter,
    /** J/mol */
    private readonly energy: number,
  ) {
    const { n, instrument, hasCurve, temperatureK, peakK, baselineErrorK } = data;
    this.n = n;
    this.instruments = data.instruments.length;
    this.x = new Float64Array(n);
    this.weight = new Float64Array(n);
    this.varianceK2 = new Float64Array(n);
    for (let i = 0; i < n; i++) {
      const at = i * CONVERSION_COUNT + HALF;
      const sigma2 = model.sigmaK[instrument[i]] ** 2;
      this.x[i] = 1 / (hasCurve[i] ? temperatureK[at] : peakK[i]);
      this.weight[i] = 1 / sigma2;
      // The scatter between scans holds their baseline errors already, up to its own size.
      this.varianceK2[i] = Math.max(sigma2, hasCurve[i] ? baselineErrorK[at] ** 2 : 0);
    }
    this.ownDegrees = this.degreesOf(undefined, 0);
  }

  /** @param more a scan to run, @param count how often; undefined where the scans are too few or the instrument is new to the sample */
  width(more?: ExpectedScan, count = more ? 1 : 0): number | undefined {
    const { data, model, n, x, weight, varianceK2, instruments } = this;
    const j = more ? data.instruments.findIndex((c) => c.instrument === more.instrument) : -1;
    if (more && j < 0) return undefined;
    const whole = n + count - model.trendParameters;
    if (whole < 1) return undefined;
    const xm = more ? 1 / more.temperatureK : 0;
    const sigma2 = more ? model.sigmaK[j] ** 2 : 1;
    const wm = count / sigma2;
    let [total, mean] = [wm, wm * xm];
    for (let i = 0; i < n; i++) {
      total += weight[i];
      mean += weight[i] * x[i];
    }
    mean /= total;
    let squares = wm * (xm - mean) ** 2;
    for (let i = 0; i < n; i++) squares += weight[i] * (x[i] - mean) ** 2;
    if (!(squares > 0)) return undefined;
    // A kelvin of error in T moves ln β by E/(R T²) along the line; E is R times its slope.
    const scatter = new Float64Array(instruments);
    const offset = new Float64Array(instruments);
    const lag = new Float64Array(instruments);
    for (let i = 0; i < n; i++) {
      const at = data.instrument[i];
      const lever = (weight[i] * (x[i] - mean) * this.energy * x[i] ** 2) / squares;
      scatter[at] += lever ** 2 * varianceK2[i];
      offset[at] += lever;
      lag[at] += lever * data.rate[i];
    }
    if (more) {
      const lever = ((xm - mean) * this.energy * xm ** 2) / (sigma2 * squares);
      scatter[j] += count * lever ** 2 * sigma2;
      offset[j] += count * lever;
      lag[j] += count * lever * more.rateKPerS;
    }
    const own = more ? this.degreesOf(more, count, j) : this.ownDegrees;
    let sum = 0;
    for (let at = 0; at < instruments; at++) {
      const c = data.instruments[at];
      sum += NORMAL ** 2 * ((offset[at] * c.offsetSeK) ** 2 + (lag[at] * c.lagSeS) ** 2);
      const degrees = instruments < 2 ? whole : model.scatterDegrees[at] + own[at] - this.ownDegrees[at];
      sum += studentQuantile(0.975, Math.max(1, Math.min(whole, degrees))) ** 2 * scatter[at];
    }
    return 2 * Math.sqrt(sum);
  }

  /** Σ(1 − leverage) by instrument for a straight or parabolic trend in 1/T, with further scans. */
  private degreesOf(more: ExpectedScan | undefined, count: number, j = -1): Float64Array {
    const out = new Float64Array(this.instruments);
    if (this.instruments < 2) return out;
    const { n, x, weight } = this;
    const p = this.model.trendParameters;
    const [middle, scale] = [(x[0] + x[n - 1]) / 2, Math.abs(x[0] - x[n - 1]) / 2 || 1];
    const normal = new Float64Array(p * p);
    const add = (u: number, w: number) => {
      for (let a = 0; a < p; a++) for (let b = 0; b < p; b++) normal[a * p + b] += w * u ** (a + b);
    };
    for (let i = 0; i < n; i++) add((x[i] - middle) / scale, weight[i]);
    const um = more ? (1 / more.temperatureK - middle) / scale : 0;
    const wm = more ? 1 / this.model.sigmaK[j] ** 2 : 0;
    if (more) add(um, count * wm);
    if (!solveSymmetric(normal, new Float64Array(p), p)) return out;
    const leverage = (u: number) => {
      let h = 0;
      for (let a = 0; a < p; a++) for (let b = 0; b < p; b++) h += normal[a * p + b] * u ** (a + b);
      return h;
    };
    for (let i = 0; i < n; i++) out[this.data.instrument[i]] += 1 - weight[i] * leverage((x[i] - middle) / scale);
    if (more) out[j] += count * (1 - wm * leverage(um));
    return out;
  }
}

/** Full width at half maximum of a JMAK event, K: 2.446 R T²/(n E). */
export const eventWidthK = (temperatureK: number, energyJPerMol: number, exponent: number): number =>
  (2.446 * GAS_CONSTANT * temperatureK ** 2) / (exponent * energyJPerMol);
