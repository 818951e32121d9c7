import { GAS_CONSTANT } from '../../schema/wire/units.ts';
import { CONVERSION_COUNT, type EventData } from '../kinetics/event-data.ts';
import type { ScatterModel } from '../kinetics/monte-carlo.ts';
import { studentQuantile } from '../numeric/distributions.ts';
import type { Candidate } from './advice-candidates.ts';

/** Index of α = 0.5 in the isoconversional table. */
const HALF = 9;

/** One temperature of the line from which E is read. */
interface Point {
  instrument: number;
  rateKPerS: number;
  temperatureK: number;
  /** K², random error of this scan alone */
  varianceK2: number;
}

/**
 * The 95 % width of E at α = 0.5, J/mol, by the linearised covariance of the fit that reports it: a line of ln β against 1/T with weights 1/σ² by
 * instrument; every scan's own scatter, and the offset and lag of each instrument shared by its scans.
 */
export class EnergyPrecision {
  private readonly points: Point[];
  private readonly degrees: number;
  private readonly sigmaK: Map<string, number>;

  constructor(
    private readonly data: EventData,
    model: ScatterModel,
    /** J/mol */
    private readonly energy: number,
  ) {
    const { n, instrument, rate, hasCurve, temperatureK, peakK, baselineErrorK } = data;
    this.sigmaK = new Map(data.instruments.map((c, j) => [c.instrument, model.sigmaK[j]]));
    this.points = Array.from({ length: n }, (_, i) => {
      const at = i * CONVERSION_COUNT + HALF;
      return {
        instrument: instrument[i],
        rateKPerS: rate[i],
        temperatureK: hasCurve[i] ? temperatureK[at] : peakK[i],
        varianceK2: model.sigmaK[instrument[i]] ** 2 + (hasCurve[i] ? baselineErrorK[at] ** 2 : 0),
      };
    });
    this.degrees = n - model.trendParameters;
  }

  /** @param more scans beside those there are, with the temperatures expected of them, K; undefined where the scans are too few */
  width(more: readonly (Candidate & { temperatureK: number })[] = []): number | undefined {
    const points = [...this.points];
    for (const { instrument, rateKPerS, temperatureK } of more) {
      const j = this.data.instruments.findIndex((c) => c.instrument === instrument);
      const sigma = this.sigmaK.get(instrument);
      if (j < 0 || sigma === undefined) return undefined;
      points.push({ instrument: j, rateKPerS, temperatureK, varianceK2: sigma ** 2 });
    }
    const degrees = this.degrees + more.length;
    const variance = this.variance(points);
    return degrees < 1 || variance === undefined
      ? undefined
      : 2 * studentQuantile(0.975, degrees) * Math.sqrt(variance);
  }

  private variance(points: readonly Point[]): number | undefined {
    const weight = (p: Point) => 1 / this.sigmaK.get(this.data.instruments[p.instrument].instrument)! ** 2;
    const total = points.reduce((s, p) => s + weight(p), 0);
    const mean = points.reduce((s, p) => s + weight(p) / p.temperatureK, 0) / total;
    const squares = points.reduce((s, p) => s + weight(p) * (1 / p.temperatureK - mean) ** 2, 0);
    if (!(squares > 0)) return undefined;
    // A kelvin of error in T moves ln β by E/(R T²) along the line; E is R times its slope.
    const lever = (p: Point) =>
      (weight(p) * (1 / p.temperatureK - mean) * this.energy) / (squares * p.temperatureK ** 2);
    let sum = points.reduce((s, p) => s + lever(p) ** 2 * p.varianceK2, 0);
    this.data.instruments.forEach((c, j) => {
      const own = points.filter((p) => p.instrument === j);
      const offset = own.reduce((s, p) => s + lever(p), 0);
      const lag = own.reduce((s, p) => s + lever(p) * p.rateKPerS, 0);
      sum += (offset * c.offsetSeK) ** 2 + (lag * c.lagSeS) ** 2;
    });
    return sum;
  }
}

/** Full width at half maximum of a JMAK event, K: 2.446 R T²/(n E). */
export const eventWidthK = (temperatureK: number, energyJPerMol: number, exponent: number): number =>
  (2.446 * GAS_CONSTANT * temperatureK ** 2) / (exponent * energyJPerMol);
