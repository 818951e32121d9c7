import type { StandardMelting } from '../../schema/wire/reduced.ts';
import type { InstrumentCalibration, InstrumentSheetRow } from '../../schema/wire/scan.ts';
import { studentQuantile } from '../numeric/distributions.ts';
import { solveSymmetric } from '../numeric/linear-solve.ts';
import { findRoot } from '../numeric/root.ts';
import { mean, median, standardDeviation } from '../numeric/statistics.ts';
import { calibrationFromSheet } from './sheet.ts';

/** One scan of a standard with what is known of the substance. */
export interface StandardObservation {
  melting: StandardMelting;
  /** K and J/kg, from the built-in list or samples.csv */
  meltingK: number;
  enthalpyJPerKg?: number;
  heatCapacityJPerKgK?: number;
  massKg?: number;
  /** the area is J/kg already */
  perMass: boolean;
}

/** Scatter between scans that noise does not know of (contact, position), K: least, and where there are too few scans to tell. */
const LEAST_SCATTER_K = 0.003;
const SCATTER_K = 0.05;
/** A linear offset needs metals this far apart and this many scans more than parameters. */
const SLOPE = { apartK: 40, spare: 2 };
/** Another mass and contact than the standard's: the error of the lag is this much wider. */
const OTHER_MASS = 1.3;
/** A tail is a response where it is this much slower than the standard's own contact lets it be. */
const SLOWER_THAN_CONTACT = 1.3;

/**
 * Offset, lag and heat factor of an instrument: T_onset − T_melting = a + b (T − T̄) + τ β by weighted least squares, b only
 * with metals far enough apart, τ only with two distinct rates (else the sheet's or the prior's is kept). The covariance knows the
 * scatter of the residuals and is widened by Student's t ÷ normal quantile, so that ± 1.96 standard errors hold 95 %.
 * @param highestRateKPerS of the instrument's scans, K/s
 * @returns the sheet's calibration when there is no observation
 */
export function calibrateFromStandards(
  instrument: string,
  row: InstrumentSheetRow | undefined,
  highestRateKPerS: number,
  observations: readonly StandardObservation[],
): InstrumentCalibration {
  const sheet = calibrationFromSheet(instrument, row, highestRateKPerS);
  if (observations.length === 0) return sheet;
  const rates = observations.map(({ melting }) => melting.rateKPerS);
  const manyRates = Math.max(...rates) > 1.2 * Math.min(...rates);
  const temperatures = observations.map(({ meltingK }) => meltingK);
  const middleK = mean(temperatures);
  const n = observations.length;
  const apart = Math.max(...temperatures) - Math.min(...temperatures) > SLOPE.apartK;
  const terms = [() => 1, ...(manyRates ? [(i: number) => rates[i]] : [])];
  if (apart && n >= terms.length + 1 + SLOPE.spare) terms.push((i) => temperatures[i] - middleK);
  const withSlope = terms.length > (manyRates ? 2 : 1);
  const late = observations.map(
    ({ melting, meltingK }) => melting.onsetK - meltingK - (manyRates ? 0 : sheet.lagS * melting.rateKPerS),
  );
  const fit = fitWithScatter(
    terms,
    late,
    observations.map(({ melting }) => melting.onsetErrorK),
    scatterShapes(rates),
  );
  if (!fit) return sheet;
  const at = { offset: 0, lag: manyRates ? 1 : -1, slope: withSlope ? terms.length - 1 : -1 };
  const places = [at.offset, at.lag, at.slope];
  const covariance = places.flatMap((i) =>
    places.map((j) => (i < 0 || j < 0 ? 0 : fit.covariance[i * terms.length + j])),
  );
  const lagS = manyRates ? fit.solution[at.lag] : sheet.lagS;
  const resistances = observations.flatMap(({ melting }) => melting.resistanceKPerW ?? []);
  const responseS = row?.responseS ?? responseFromTails(observations, lagS);
  const { responseS: _unused, ...plain } = sheet;
  return {
    ...plain,
    source: 'standards',
    offsetK: fit.solution[at.offset],
    offsetSeK: Math.sqrt(covariance[0]),
    lagS,
    lagSeS: manyRates ? OTHER_MASS * Math.sqrt(covariance[4]) : sheet.lagSeS,
    ...(responseS !== undefined && { responseS }),
    standards: n,
    ...(withSlope && { offsetSlope: fit.solution[at.slope], offsetAtK: middleK }),
    covariance,
    ...heatFactorOf(observations),
    ...(resistances.length > 0 && { resistanceKPerW: median(resistances) }),
  };
}

/**
 * Shape of the scatter between scans over their rates: position and repeatability move an onset by so many kelvins, a contact that is never
 * quite the same by so many seconds, that is by kelvins that grow with rate. Both are taken to weigh the same at the highest rate, since a
 * handful of scans cannot tell them apart.
 */
function scatterShapes(rates: readonly number[]): number[] {
  const highest = Math.max(...rates);
  return rates.map((rate) => Math.hypot(1, rate / highest));
}

/**
 * Weighted least squares with a scatter between scans whose size makes χ² equal its degrees of freedom (Paule & Mandel 1982,
 * J. Res. NBS 87:377): neither quiet slow scans nor noisy fast ones carry the fit alone.
 */
function fitWithScatter(
  terms: readonly ((i: number) => number)[],
  values: readonly number[],
  errors: readonly number[],
  shapes: readonly number[],
): { solution: Float64Array; covariance: Float64Array } | undefined {
  const degrees = values.length - terms.length;
  const fitAt = (scatter: number) =>
    fitWeighted(
      terms,
      values,
      errors.map((error, i) => Math.hypot(error, scatter * shapes[i])),
    );
  if (degrees <= 0) return fitAt(SCATTER_K);
  const excess = (scatter: number) => (fitAt(scatter)?.chi ?? 0) - degrees;
  const largest = 10 * Math.max(SCATTER_K, ...values.map(Math.abs));
  const scatter = excess(LEAST_SCATTER_K) <= 0 ? LEAST_SCATTER_K : findRoot(excess, LEAST_SCATTER_K, largest, 1e-5);
  const fit = fitAt(scatter);
  const widened = (studentQuantile(0.975, degrees) / NORMAL_975) ** 2;
  return fit && { ...fit, covariance: fit.covariance.map((v) => v * widened) };
}

function fitWeighted(
  terms: readonly ((i: number) => number)[],
  values: readonly number[],
  errors: readonly number[],
): { solution: Float64Array; covariance: Float64Array; chi: number } | undefined {
  const p = terms.length;
  const covariance = new Float64Array(p * p);
  const solution = new Float64Array(p);
  const weights = errors.map((error) => 1 / error ** 2);
  values.forEach((value, k) => {
    for (let i = 0; i < p; i++) {
      solution[i] += weights[k] * terms[i](k) * value;
      for (let j = 0; j < p; j++) covariance[i * p + j] += weights[k] * terms[i](k) * terms[j](k);
    }
  });
  if (!solveSymmetric(covariance, solution, p)) return undefined;
  let chi = 0;
  values.forEach((value, k) => {
    let fitted = 0;
    for (let i = 0; i < p; i++) fitted += solution[i] * terms[i](k);
    chi += weights[k] * (value - fitted) ** 2;
  });
  return { solution, covariance, chi };
}

const NORMAL_975 = 1.959964;
/** Scans from which on their own scatter tells the error of the heat factor. */
const FEWEST_FOR_SCATTER = 4;
/** Part of the baseline's error that all scans of an instrument have in common, from trials (study `standards`). */
const COMMON_PART = 0.2;

/** True heat ÷ measured heat from the areas (ASTM E968), and its standard error. */
function heatFactorOf(observations: readonly StandardObservation[]): { heatFactor?: number; heatFactorSe?: number } {
  const factors = observations.flatMap(({ melting, enthalpyJPerKg, massKg, perMass }) => {
    const heat =
      enthalpyJPerKg === undefined ? undefined : perMass ? enthalpyJPerKg : massKg && massKg * enthalpyJPerKg;
    return heat ? [heat / melting.area] : [];
  });
  if (factors.length === 0) return {};
  const heatFactor = mean(factors);
  const n = factors.length;
  // What baseline and limits leave open differs from metal to metal and from rate to rate: most of it is in the scatter where that is seen.
  const single = median(observations.map(({ melting }) => melting.areaError / melting.area)) * heatFactor;
  const heatFactorSe =
    n < FEWEST_FOR_SCATTER
      ? single
      : Math.hypot(
          (standardDeviation(factors) / Math.sqrt(n)) * (studentQuantile(0.975, n - 1) / NORMAL_975),
          COMMON_PART * single,
        );
  return { heatFactor, heatFactorSe };
}

/**
 * First-order response from the tails behind the peaks, which fall as exp(−t/τ_r), where they cannot be the standard's own
 * contact: that falls with R_th m c_p, R_th being the leading edge's resistance.
 */
function responseFromTails(observations: readonly StandardObservation[], lagS: number): number | undefined {
  const responses = observations.flatMap(({ melting, massKg, heatCapacityJPerKgK }) => {
    if (melting.tailS === undefined || melting.resistanceKPerW === undefined) return [];
    if (massKg === undefined || heatCapacityJPerKgK === undefined) return [];
    const contactS = melting.resistanceKPerW * massKg * heatCapacityJPerKgK;
    return melting.tailS > SLOWER_THAN_CONTACT * contactS ? [melting.tailS] : [];
  });
  if (responses.length < Math.ceil(observations.length / 2)) return undefined;
  return Math.min(median(responses), Math.max(0, lagS));
}
