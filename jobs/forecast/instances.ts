import type { ForecastSource } from '../../schema/wire/forecasts.ts';
import type { Kinetics } from './kinetics.ts';
import { isWhole, modelFreeKinetics } from './model-free-kinetics.ts';
import { drawnParameters, type LawParameters, sharedRateCurve, straightRateCurve } from './rate-curve.ts';
import { findFastest, SharedKinetics } from './shared-kinetics.ts';

/** One method's law with its numbers filled in: the estimate, every draw, and the pessimistic law where there is one. */
export interface Instances {
  method: 'shared_law' | 'model_free';
  estimate: Kinetics;
  draws: Kinetics[];
  degreesOfFreedom: number;
  /** The straight law beside a frozen one, and below which temperature it bounds the answer, K */
  pessimistic?: { kinetics: Kinetics; belowK: number };
}

/** The methods that a source supports, shared law first. */
export function instancesOf(source: ForecastSource): Instances[] {
  const out: Instances[] = [];
  const shared = sharedInstances(source);
  if (shared) out.push(shared);
  const free = modelFreeInstances(source);
  if (free) out.push(free);
  return out;
}

function sharedInstances({ law, lawDraws, melting, degreesOfFreedom }: ForecastSource): Instances | undefined {
  if (!law || !isWhole([law.lnRateAtMiddle, law.energyJPerMol, law.bend, law.avramiExponent])) return undefined;
  // Above melting nothing crystallises; where the driving force is known the rate has its top below that.
  const fastest =
    melting && ((lnRate: Kinetics['lnRate']) => findFastest(lnRate, law.lowestMeasuredK, melting.meltingK));
  const make = (p: LawParameters, of: typeof sharedRateCurve) => new SharedKinetics(of(law, p, melting), fastest);
  const draws: Kinetics[] = [];
  for (let d = 0; d < (lawDraws?.bend.length ?? 0); d++) {
    const p = drawnParameters(lawDraws!, d);
    if (isWhole([p.lnRateAtMiddle, p.energyJPerMol, p.bend, p.avramiExponent])) draws.push(make(p, sharedRateCurve));
  }
  return {
    method: 'shared_law',
    estimate: make(law, sharedRateCurve),
    draws,
    degreesOfFreedom,
    pessimistic: { kinetics: make(law, straightRateCurve), belowK: law.frozenBelowK },
  };
}

function modelFreeInstances(source: ForecastSource): Instances | undefined {
  const { modelFree, modelFreeDraws } = source;
  if (!modelFree || !isWhole(modelFree.energyJPerMol) || !isWhole(modelFree.lnStep) || !isWhole(modelFree.share))
    return undefined;
  return {
    method: 'model_free',
    ...modelFreeKinetics(modelFree, modelFreeDraws),
    degreesOfFreedom: source.modelFreeDegreesOfFreedom ?? source.degreesOfFreedom,
  };
}
