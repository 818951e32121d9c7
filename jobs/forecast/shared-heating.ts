import type { ForecastSource } from '../../schema/wire/forecasts.ts';
import type { SharedLaw } from '../../schema/wire/shared-law.ts';
import { CRITICAL_CONVERSION, coldEnd } from './critical-rates.ts';
import { createSpread, type Heating, type HeatingAsk } from './diagram-line.ts';
import { extentOf } from './kinetics.ts';
import { isWhole } from './model-free-kinetics.ts';
import { accumulate, COARSE, FINE, layPanels, lnIntegral, timeOfIntegral } from './programme.ts';
import { type LawParameters, type RateCurve, sharedRateCurve, straightRateCurve } from './rate-curve.ts';

/** Without a melting temperature lines end at this multiple of the highest measured one. */
const TOP = 1.5;
/** Step of the central differences, of ln E and of the bend: the law is smooth in both. */
const STEP = 1e-3;
/** Temperatures nearer than this share a knot, K. */
const SAME_K = 1e-6;

/** ln ∫K dT from the cold, and the temperature where it has a value; NaN where it never does. */
interface HeatingIntegral {
  lnAt(temperatureK: number): number;
  temperatureOf(lnTarget: number): number;
}

/** On a ramp of 1 K/s time is temperature, so ∫K dT is ∫K dt along it. */
const ramp = (knotsK: readonly number[]) => {
  const temperatureK = Float64Array.from(knotsK);
  return { name: '', timeS: temperatureK, temperatureK };
};

/**
 * Heating at β by the shared law: 1 − α = exp[−(∫K dT/β)^n], so a conversion is reached where ln ∫K dT = ln X/n + ln β, X = −ln(1 − α).
 * Undefined without a law.
 */
export function createSharedHeating(source: ForecastSource): Heating | undefined {
  const { law, melting } = source;
  if (!law || !isWhole([law.lnRateAtMiddle, law.energyJPerMol, law.bend, law.avramiExponent])) return undefined;
  const topK = melting?.meltingK ?? law.highestMeasuredK * TOP;
  const curve = sharedRateCurve(law, law, melting);
  const estimate = integrate(curve, law.lowestMeasuredK, topK);
  let pessimistic: HeatingIntegral | undefined;
  const straightOf = (target: number) => {
    pessimistic ??= integrate(straightRateCurve(law, law, melting), law.lowestMeasuredK, topK);
    return pessimistic.temperatureOf(target);
  };
  const shift = (conversion: number) => extentOf(conversion) / law.avramiExponent;
  return {
    method: 'shared_law',
    answer(asked) {
      const targets = asked.map(({ conversion, lnRate }) => shift(conversion) + lnRate);
      const reachedK = targets.map(estimate.temperatureOf);
      const halves = halfWidths(source, law, curve, asked, reachedK);
      return targets.map((target, i) => {
        const K = reachedK[i];
        if (Number.isNaN(K)) return { K, lower: K, upper: K };
        const half = halves[i];
        let lower = half > 0 ? estimate.temperatureOf(target - half) : K;
        const upper = half > 0 ? estimate.temperatureOf(target + half) : K;
        // A glass may be no more stable than the straight law says.
        const straightK = K < law.frozenBelowK ? straightOf(target) : K;
        if (straightK < lower) lower = straightK;
        // Not reached before melting: melting ends the band.
        return { K, lower, upper: Number.isNaN(upper) ? topK : upper };
      });
    },
    lnRateOf: (conversion, temperatureK) => estimate.lnAt(temperatureK) - shift(conversion),
    ...(melting && { lnCriticalRate: estimate.lnAt(topK) - shift(CRITICAL_CONVERSION) }),
  };
}

function integrate(curve: RateCurve, measuredK: number, topK: number): HeatingIntegral {
  const fromK = coldEnd(curve, measuredK);
  const panels = layPanels(ramp([fromK, topK]), curve.steepness, curve.breaksK, FINE);
  const done = accumulate(panels, curve.lnRate);
  const total = lnIntegral(done);
  return {
    lnAt(T) {
      if (T >= topK) return total;
      const part = layPanels(ramp([fromK, T]), curve.steepness, curve.breaksK, COARSE);
      return lnIntegral(accumulate(part, curve.lnRate));
    },
    temperatureOf: (lnTarget) =>
      lnTarget <= total ? fromK + timeOfIntegral(panels, done, curve.lnRate, lnTarget) : Number.NaN,
  };
}

/**
 * Half of the 95 % interval of ln β at the temperature of each point, to first order in what was drawn; 0 where too few draws make one,
 * NaN where the temperature is.
 */
function halfWidths(
  { lawDraws, melting, degreesOfFreedom }: ForecastSource,
  law: SharedLaw,
  curve: RateCurve,
  asked: readonly HeatingAsk[],
  reachedK: readonly number[],
): number[] {
  const rising = [...reachedK.keys()].filter((i) => reachedK[i] > 0).sort((a, b) => reachedK[a] - reachedK[b]);
  const knots: number[] = [];
  for (const i of rising) if (!(reachedK[i] - knots[knots.length - 1] < SAME_K)) knots.push(reachedK[i]);
  if (!lawDraws || knots.length === 0) return asked.map(() => 0);
  const panels = layPanels(ramp([coldEnd(curve, knots[0]), ...knots]), curve.steepness, curve.breaksK, COARSE);
  const last = new Int32Array(reachedK.length).fill(-1);
  let panel = -1;
  for (const i of rising) {
    while (panels.toK[panel + 1] < reachedK[i] + SAME_K / 2) panel++;
    last[i] = panel;
  }
  const lnIntegrals = (p: Partial<LawParameters>) => {
    const { lnScale, sums } = accumulate(panels, sharedRateCurve(law, { ...law, ...p }, melting).lnRate);
    return Float64Array.from(last, (at) => lnScale + Math.log(sums[at]));
  };
  const slopes = (of: (step: number) => Partial<LawParameters>) => {
    const [below, above] = [lnIntegrals(of(-STEP)), lnIntegrals(of(STEP))];
    return above.map((v, i) => (v - below[i]) / (2 * STEP));
  };
  const byLnEnergy = slopes((step) => ({ energyJPerMol: law.energyJPerMol * Math.exp(step) }));
  const byBend = slopes((step) => ({ bend: law.bend + step }));
  const { lnRateAtMiddle, energyJPerMol, bend, avramiExponent } = lawDraws;
  const spread = createSpread(
    [lnRateAtMiddle, energyJPerMol, bend, avramiExponent.map((n) => 1 / n)],
    degreesOfFreedom,
  );
  return asked.map(({ conversion }, i) =>
    spread([1, byLnEnergy[i] / law.energyJPerMol, byBend[i], -extentOf(conversion)]),
  );
}
