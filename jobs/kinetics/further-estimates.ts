import type { ArrheniusIntegral } from '../laws/arrhenius-integral.ts';
import { fitMatusitaSakka, type MatusitaSakkaEstimate } from './avrami/matusita-sakka.ts';
import { fitOzawa } from './avrami/ozawa.ts';
import type { EstimateSettings, Estimates } from './estimate.ts';
import { CONVERSION_COUNT, type EventColumns, pooledMean, usableWeights } from './event-data.ts';
import { fitVyazovkinLinear } from './isoconversional/vyazovkin-linear.ts';
import { compensationLnPrefactor } from './models/compensation.ts';
import { fitSestakBerggren, type SestakBerggrenEstimate } from './models/sestak-berggren.ts';

/** What the curve methods beside the main ones give, estimate or draw. */
export interface FurtherEstimates {
  vyazovkinLinear: Float64Array;
  friedmanLnPrefactor: number;
  /** NaN where no temperature has three rates */
  ozawaExponent: number;
  matusitaSakka: MatusitaSakkaEstimate;
  sestakBerggren?: SestakBerggrenEstimate;
}

export interface FurtherPlan {
  ozawaTemperatures: readonly number[];
  /** the JMAK law does not hold: fit α^M (1−α)^N in its place */
  sestakBerggren: boolean;
}

/** Estimates near by: in a draw energies move together, so their ratio there is the better start. */
export interface Neighbour {
  main: Estimates;
  further: FurtherEstimates;
}

/** Makes the function that computes them from the columns as they stand when it is called; buffers are made once. */
export function createFurtherEstimator(
  d: EventColumns,
  { curves, curveWeights, usable }: EstimateSettings,
  plan: FurtherPlan,
): (main: Estimates, warm?: Neighbour) => FurtherEstimates {
  const m = curves.length;
  const { at, whole: usedWhole, determined } = usableWeights(d, curves, curveWeights, usable);
  const weights = new Float64Array(m);
  const whole = new Float64Array(m);
  const rate = Float64Array.from(curves, (i) => d.rate[i]);
  const lnRate = rate.map(Math.log);
  const T = new Float64Array(m);
  const work: ArrheniusIntegral[] = Array.from({ length: m }, () => ({ value: 0, byEnergy: 0, byEnergy2: 0 }));
  return (main, warm) => {
    const vyazovkinLinear = new Float64Array(CONVERSION_COUNT);
    for (let k = 0; k < CONVERSION_COUNT; k++) {
      for (let j = 0; j < m; j++) {
        T[j] = d.temperatureK[curves[j] * CONVERSION_COUNT + k];
        weights[j] = at[k][j] > 0 ? curveWeights[j] : 0;
      }
      const ratio = warm ? warm.further.vyazovkinLinear[k] / warm.main.starink[k] : 1;
      vyazovkinLinear[k] = fitVyazovkinLinear(rate, T, weights, main.starink[k] * ratio, work).energy;
    }
    for (let j = 0; j < m; j++) whole[j] = usedWhole[j] > 0 ? curveWeights[j] : 0;
    const energy = pooledMean(main.friedman, determined);
    const sestakBerggren = plan.sestakBerggren ? fitSestakBerggren(d, curves, whole) : undefined;
    return {
      vyazovkinLinear,
      friedmanLnPrefactor: compensationLnPrefactor(d, curves, whole, energy),
      ozawaExponent: fitOzawa(d, curves, lnRate, whole, plan.ozawaTemperatures),
      matusitaSakka: fitMatusitaSakka(d, curves, lnRate, whole),
      ...(sestakBerggren && { sestakBerggren }),
    };
  };
}
