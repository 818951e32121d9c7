import type { ForecastSource, MeltingData, ModelFreeCurve, ModelFreeDraws } from '../../schema/wire/forecasts.ts';
import type { SharedLaw, SharedLawDraws } from '../../schema/wire/shared-law.ts';
import type { GlassFacts, Verdict } from '../../schema/wire/verdicts.ts';

/** What the two steps before give; either may be missing, not both. */
export interface SourceParts {
  sample: string;
  event: number;
  facts: GlassFacts;
  shared?: { law: SharedLaw; draws: SharedLawDraws; degreesOfFreedom: number; verdict: Verdict };
  modelFree?: {
    curve: ModelFreeCurve;
    draws: ModelFreeDraws;
    degreesOfFreedom: number;
    /** Temperatures of the event over its scans, K */
    lowestK: number;
    highestK: number;
  };
}

/** Puts together what forecasts of one event rest on. @returns undefined where neither method has anything */
export function makeForecastSource({
  sample,
  event,
  facts,
  shared,
  modelFree,
}: SourceParts): ForecastSource | undefined {
  if (!shared && !modelFree) return undefined;
  const glassTransitionK = shared?.law.glassTransitionK ?? facts.glassTransitionK;
  const melting = meltingOf(facts);
  return {
    sample,
    event,
    degreesOfFreedom: shared?.degreesOfFreedom ?? modelFree!.degreesOfFreedom,
    lowestMeasuredK: shared?.law.lowestMeasuredK ?? modelFree!.lowestK,
    highestMeasuredK: shared?.law.highestMeasuredK ?? modelFree!.highestK,
    ...(glassTransitionK !== undefined && { glassTransitionK }),
    ...(facts.series !== undefined &&
      facts.solventFraction !== undefined && { solventFraction: facts.solventFraction }),
    ...(melting && { melting }),
    ...(shared && { verdict: shared.verdict, law: shared.law, lawDraws: shared.draws }),
    ...(modelFree && {
      modelFree: modelFree.curve,
      modelFreeDraws: modelFree.draws,
      modelFreeDegreesOfFreedom: modelFree.degreesOfFreedom,
    }),
  };
}

function meltingOf({ meltingK, meltingEnthalpyJPerKg, molarMassKgPerMol }: GlassFacts): MeltingData | undefined {
  if (meltingK === undefined) return undefined;
  return meltingEnthalpyJPerKg === undefined || molarMassKgPerMol === undefined
    ? { meltingK }
    : { meltingK, enthalpyJPerMol: meltingEnthalpyJPerKg * molarMassKgPerMol };
}
