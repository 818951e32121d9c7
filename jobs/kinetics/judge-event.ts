import { type Flag, flag } from '../../schema/wire/flags.ts';
import { studentQuantile } from '../numeric/distributions.ts';
import { median, robustSigma, standardDeviation } from '../numeric/statistics.ts';
import type { DrawnColumns } from './drawn-columns.ts';
import type { Estimates } from './estimate.ts';
import { CONVERSIONS, POOLED, pooledMean } from './event-data.ts';
import type { ScatterModel } from './monte-carlo.ts';

/** E(α) that varies by more than this part of its mean over 0.1 … 0.9 raises `energy-varies` when its interval bears it (ICTAC 2011). */
const ENERGY_VARIES = 0.1;
/** A scan this many robust sigmas from the trend is told. */
const OUTLIER_SIGMAS = 4;
/** A global JMAK fit with a residual above this in α does not describe the curves. */
export const JMAK_RESIDUAL = 0.03;
/** … and one whose scans lie, in the mean, this many times their scatter from where the law puts them does not place them. */
const JMAK_SHIFTS = 4;

/** Scans far from the trend of the others: told, never dropped. */
export function findOutliers(model: ScatterModel, where: { sample: string; event: number }): Flag[] {
  const { data, peak } = model;
  const standardised = peak.residuals.map(
    (r, i) => r / (model.sigmaK[data.instrument[i]] * Math.sqrt(1 - peak.leverage[i])),
  );
  // The scatter of the other scans, not of all: one wild scan must not hide behind the scatter it makes.
  const sigma = robustSigma(standardised);
  const centre = median(standardised);
  const out: Flag[] = [];
  data.scans.forEach((s, i) => {
    const far = Math.abs(standardised[i] - centre) / sigma;
    const K = peak.residuals[i];
    if (data.n >= 6 && far > OUTLIER_SIGMAS && Math.abs(K) > 0.02 * data.widthK[i]) {
      out.push(
        flag(
          'outlier',
          `The peak of this scan lies ${K.toFixed(2)} K from the trend of the others, ${far.toFixed(1)} robust sigmas (limit ${OUTLIER_SIGMAS}).`,
          'Look at the scan; exclude it with a reason if it is at fault.',
          { ...where, file: s.file, instrument: s.instrument },
        ),
      );
    }
  });
  return out;
}

/** `energy-varies` where E(α) changes by more than 10 % of its mean and more than its interval. */
export function judgeEnergy(
  estimate: Estimates,
  drawn: DrawnColumns,
  model: ScatterModel,
  determined: readonly boolean[],
  where: { sample: string; event: number },
): Flag | undefined {
  const E = estimate.vyazovkin;
  let high = -1;
  let low = -1;
  for (let k = POOLED.from; k < POOLED.to; k++) {
    if (!determined[k]) continue;
    if (high < 0 || E[k] > E[high]) high = k;
    if (low < 0 || E[k] < E[low]) low = k;
  }
  if (high < 0) return undefined;
  const range = E[high] - E[low];
  const middle = pooledMean(E, determined);
  const { vyazovkin } = drawn.curve;
  const lowest = drawn.atConversion(vyazovkin, low);
  const spread = standardDeviation(drawn.atConversion(vyazovkin, high).map((v, d) => v - lowest[d]));
  const error = studentQuantile(0.975, Math.max(1, model.curves.length - model.trendParameters)) * spread;
  if (!(range > ENERGY_VARIES * middle && range > error)) return undefined;
  const at = (k: number) => CONVERSIONS[k].toFixed(2);
  return flag(
    'energy-varies',
    `E goes from ${(E[low] / 1e3).toFixed(1)} kJ/mol at α = ${at(low)} to ${(E[high] / 1e3).toFixed(1)} at α = ${at(high)}, ${((100 * range) / middle).toFixed(0)} % of its mean (limit 10 %) and more than its interval ${(error / 1e3).toFixed(1)}. Open causes: more than one step, a bent rate law, a response of the instrument left in.`,
    'Do not use one E for a forecast; look at E(α) and at the instruments’ response times.',
    where,
  );
}

/** Whether the global JMAK fit ended well and describes the curves. */
export function judgeJmak(estimate: Estimates, where: { sample: string; event: number }): Flag[] {
  const { jmak } = estimate;
  if (!jmak) return [];
  if (!jmak.fit.converged) {
    return [
      flag(
        'fit-not-converged',
        `The global JMAK fit stopped: ${jmak.fit.message}.`,
        'Treat its numbers as a guide only; look at the curves for damage.',
        where,
      ),
    ];
  }
  const quality = jmak.quality;
  if (quality && quality.residualRms > JMAK_RESIDUAL) {
    return [
      flag(
        'not-avrami',
        `One JMAK law with one energy leaves a residual of ${quality.residualRms.toFixed(3)} in conversion (limit ${JMAK_RESIDUAL}).`,
        'Use the isoconversional energies; its n and E describe no single process. A rate law that bends over many decades does this too.',
        where,
      ),
    ];
  }
  if (quality && quality.shiftRms > JMAK_SHIFTS) {
    return [
      flag(
        'not-avrami',
        `One JMAK law with one energy leaves the scans ${quality.shiftRms.toFixed(1)} times their own scatter from their places (limit ${JMAK_SHIFTS}).`,
        'The shape of the curves may still be JMAK; a rate law that bends over many decades does this. Do not use its one E for a forecast.',
        where,
      ),
    ];
  }
  return [];
}
