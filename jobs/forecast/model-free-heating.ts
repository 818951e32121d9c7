import type { ForecastSource, ModelFreeCurve } from '../../schema/wire/forecasts.ts';
import { GAS_CONSTANT } from '../../schema/wire/units.ts';
import { addStretch } from '../laws/arrhenius-integral.ts';
import { temperatureIntegralFactorFast } from '../laws/temperature-integral.ts';
import { createSpread, drawsOf, type Heating } from './diagram-line.ts';
import { isWhole, placeAt } from './model-free-kinetics.ts';

/** Exponents between the first segment's end and where its integral begins: e^−40 of it is left out. */
const DEPTH = 40;
const MOST_STEPS = 30;
const WITHIN = 1e-10;

/** A temperature on a ramp, with its derivatives by ln of the step and by the energy, in turn, of each segment up to it. */
interface Reached {
  K: number;
  gradient: Float64Array;
}

/**
 * Heating at β without a model. Segment k ends at T_k, where ∫ w_k dT from T_(k−1) = β J_k; w_k(T) = exp[−(E_k/R)(1/T − x0)], J_k = exp(lnStep_k) times the
 * share of the segment that is asked for, and T_(−1) = 0. Each T_k is found by Newton on the integral in closed form. Its change follows from
 *   w_k(T_k) dT_k = w_k(T_(k−1)) dT_(k−1) + β J_k (d lnStep_k + d ln β) − (∂/∂E_k ∫ w_k dT) dE_k,
 * so that the spread of T follows from that of what was drawn, to first order. Undefined without a description, or with an energy
 * that is not above zero.
 */
export function createModelFreeHeating(source: ForecastSource): Heating | undefined {
  const { modelFree: curve } = source;
  if (!curve || !isWhole(curve.lnStep) || !isWhole(curve.share)) return undefined;
  if (!isWhole(curve.energyJPerMol) || !curve.energyJPerMol.every((E) => E > 0)) return undefined;
  return {
    method: 'model_free',
    answer(asked) {
      const bandAt = createBand(source, curve.conversions.length);
      return asked.map(({ conversion, lnRate }) => bandAt(reach(curve, conversion, lnRate)));
    },
    lnRateOf(conversion, temperatureK) {
      let lnRate = 0;
      for (let i = 0; i < MOST_STEPS; i++) {
        const reached = reach(curve, conversion, lnRate);
        const step = ((1 / reached.K - 1 / temperatureK) * reached.K ** 2) / byLnRate(reached);
        lnRate += step;
        if (Math.abs(step) < WITHIN) break;
      }
      return lnRate;
    },
  };
}

const byLnRate = ({ gradient }: Reached): number => gradient.reduce((sum, v, j) => (j % 2 === 0 ? sum + v : sum), 0);

/** The band of a temperature from the spread of ln β at it. */
function createBand(
  { modelFreeDraws: drawn, modelFreeDegreesOfFreedom, degreesOfFreedom }: ForecastSource,
  count: number,
) {
  const places = drawsOf(Math.floor((drawn?.lnStep.length ?? 0) / count));
  // Step and energy of a segment side by side: a conversion needs those up to its own.
  const columns = Array.from({ length: 2 * count }, (_, j) => {
    const column = new Float64Array(places.length);
    const all = j % 2 === 0 ? drawn?.lnStep : drawn?.energyJPerMol;
    for (let d = 0; d < column.length; d++) column[d] = all![places[d] * count + (j >> 1)];
    return column;
  });
  const spread = createSpread(columns, modelFreeDegreesOfFreedom ?? degreesOfFreedom);
  return (reached: Reached) => {
    const { K, gradient } = reached;
    // 1/T is nearly a straight line in ln β, so half of ln β times its slope is what the draws move T by.
    const dx = spread(gradient) / K ** 2;
    return { K, lower: 1 / (1 / K + dx), upper: 1 / Math.max(1 / K - dx, Number.MIN_VALUE) };
  };
}

function reach(curve: ModelFreeCurve, conversion: number, lnRate: number): Reached {
  const { energyJPerMol, lnStep, x0PerK } = curve;
  const { segment, share } = placeAt(curve, conversion);
  const gradient = new Float64Array(2 * (segment + 1));
  const out = { value: 0, byEnergy: 0, byEnergy2: 0 };
  let K = 0;
  for (let k = 0; k <= segment; k++) {
    const c = energyJPerMol[k] / GAS_CONSTANT;
    const shift = c * x0PerK;
    const lnGoal = lnRate + lnStep[k] + (k === segment ? Math.log(share) : 0);
    const goal = Math.exp(lnGoal);
    const weight = (T: number) => Math.exp(shift - c / T);
    let T: number;
    let fromK = K;
    if (k === 0) {
      const x = firstExponent(Math.log(c) + shift - lnGoal);
      T = c / x;
      fromK = c / (x + DEPTH);
    } else {
      // As if the exponent were straight in T.
      const s = c / (K * K);
      T = K + Math.log1p((goal * s) / weight(K)) / s;
    }
    for (let i = 0; i < MOST_STEPS; i++) {
      out.value = 0;
      out.byEnergy = 0;
      addStretch(fromK, T, T - fromK, c, shift, out);
      const step = (goal - out.value) / weight(T);
      T += step;
      if (!(Math.abs(step) > WITHIN * T)) break;
    }
    const end = weight(T);
    const carried = k === 0 ? 0 : weight(K) / end;
    for (let j = 0; j < 2 * k; j++) gradient[j] *= carried;
    gradient[2 * k] = goal / end;
    gradient[2 * k + 1] = -(out.byEnergy + (x0PerK / GAS_CONSTANT) * out.value) / end;
    K = T;
  }
  return { K, gradient };
}

/** x = E/(R T) where ln[h(x) e^−x/x²] = −lnRest: c e^shift p(x) is the integral from 0 to T. */
function firstExponent(lnRest: number): number {
  let x = Math.max(1, lnRest);
  for (let i = 0; i < MOST_STEPS; i++) {
    const step = (lnRest - x - 2 * Math.log(x) + Math.log(temperatureIntegralFactorFast(x))) / (1 + 2 / x);
    x = Math.max(1, x + step);
    if (Math.abs(step) < 1e-8 * x) break;
  }
  return x;
}
