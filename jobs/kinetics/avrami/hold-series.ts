import type { FitScan } from '../../../schema/wire/parameters.ts';
import { CONVERSION_GRID } from '../../../schema/wire/reduced.ts';
import type { InstrumentCalibration } from '../../../schema/wire/scan.ts';
import { GAS_CONSTANT } from '../../../schema/wire/units.ts';
import { fitLine } from '../../numeric/line.ts';
import type { Random } from '../../numeric/random.ts';
import { mean } from '../../numeric/statistics.ts';
import { drawCalibration } from '../monte-carlo.ts';
import { fitHold, type HoldEstimate } from './isothermal.ts';

/** One hold with its fit. */
export interface Hold {
  scan: FitScan;
  temperatureK: number;
  fit: HoldEstimate;
  exponentError: number;
}

export interface HoldEnergy {
  energy: number;
  energyError: number;
  lnPrefactor: number;
  /** of ln K about the line */
  scatter: number;
  fitted: Float64Array;
  leverage: Float64Array;
}

/** E and ln A from ln K against 1/T; one temperature alone leaves ln K as it is. */
export function fitArrhenius(holds: readonly { temperatureK: number; fit: { lnRate: number } }[]): HoldEnergy {
  const x = Float64Array.from(holds, (h) => 1 / h.temperatureK);
  const y = Float64Array.from(holds, (h) => h.fit.lnRate);
  const mx = mean(x);
  const xx = x.reduce((s, v) => s + (v - mx) ** 2, 0);
  if (!(xx > 0)) {
    const none = { energy: Number.NaN, energyError: Number.NaN, lnPrefactor: Number.NaN, scatter: Number.NaN };
    return { ...none, fitted: y, leverage: new Float64Array(y.length) };
  }
  const line = fitLine(x, y);
  return {
    energy: -GAS_CONSTANT * line.slope,
    energyError: GAS_CONSTANT * line.slopeError,
    lnPrefactor: line.intercept,
    scatter: line.scatter,
    fitted: y.map((v, i) => v - line.residuals[i]),
    leverage: x.map((v) => Math.min(0.99, 1 / x.length + (v - mx) ** 2 / xx)),
  };
}

export interface HoldDraw {
  exponents: number[];
  energy: number;
  lnPrefactor: number;
}

/** Conversions of a draw: below 0.05 the logarithm of t − t0 is not to be trusted. */
const ROWS = [...CONVERSION_GRID.keys()].filter((k) => CONVERSION_GRID[k] > 0.0499 && CONVERSION_GRID[k] < 0.9501);
const CONVERSION = ROWS.map((k) => CONVERSION_GRID[k]);
const LN_LN = CONVERSION.map((a) => Math.log(-Math.log1p(-a)));
/** t − t0 is taken as at least this part of its value at α = 0.5. */
const LEAST_TIME = 1e-3;

/**
 * Draws of a series of holds: every hold's curve is that of the common law (mean n, ln K on the line) times the whole residual curve, in
 * ln(t − t0), of a hold taken with replacement; each is fitted again. An error of the instrument's offset moves its temperatures together.
 * @param calibrations of the holds' instruments
 */
export function holdDraws(
  holds: Hold[],
  line: HoldEnergy,
  calibrations: readonly InstrumentCalibration[],
  random: Random,
  draws: number,
): HoldDraw[] {
  const n = mean(holds.map((h) => h.fit.exponent));
  const residual = holds.map(({ scan, fit }, i) => {
    const t = (k: number) => (scan.event.curve?.timeS[k] ?? 0) - fit.startS;
    const least = LEAST_TIME * t(49);
    return ROWS.map((k, r) => Math.log(Math.max(least, t(k))) - LN_LN[r] / n + line.fitted[i]);
  });
  const out: HoldDraw[] = [];
  for (let d = 0; d < draws; d++) {
    const offsets = new Map(calibrations.map((c) => [c.instrument, drawCalibration(c, random).offset]));
    const drawn = holds.map((hold, i) => {
      const from = random.integer(holds.length);
      const lift = 1 / Math.sqrt(1 - line.leverage[from]);
      const { startS } = hold.fit;
      const timeS = Float64Array.from(
        ROWS,
        (_, r) => startS + Math.exp(LN_LN[r] / n - line.fitted[i] + lift * residual[from][r]),
      );
      const fit = fitHold(timeS, CONVERSION, hold.scan.event.holdReachedS ?? startS);
      return { temperatureK: hold.temperatureK - (offsets.get(hold.scan.instrument) ?? 0), fit };
    });
    const { energy, lnPrefactor } = fitArrhenius(drawn);
    out.push({ exponents: drawn.map((h) => h.fit.exponent), energy, lnPrefactor });
  }
  return out;
}
