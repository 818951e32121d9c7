import { createRandom } from '../../jobs/numeric/random.ts';
import type { ForecastSource, ModelFreeCurve, ProgrammeTable } from '../../schema/wire/forecasts.ts';
import type { SharedLaw } from '../../schema/wire/shared-law.ts';
import { GAS_CONSTANT as R } from '../../schema/wire/units.ts';

/** An invented bent law over 620 … 680 K; every value synthetic. */
export const LAW: SharedLaw = {
  sample: 'glass-a',
  event: 1,
  lnRateAtMiddle: -6.5,
  energyJPerMol: 280e3,
  bend: 0.35,
  x0PerK: 1 / 640,
  dxPerK: 1.2e-4,
  avramiExponent: 2.6,
  frozenBelowK: 600,
  lowestMeasuredK: 620,
  highestMeasuredK: 680,
};

/** The model-free description of a JMAK process with one energy, exact: J(α) = [−ln(1 − α)]^(1/n)/K(1/x0). */
export function exactModelFree(
  energyJPerMol: number,
  lnRateAtX0: number,
  exponent: number,
  x0PerK: number,
): ModelFreeCurve {
  const conversions = Float64Array.from({ length: 19 }, (_, k) => (k + 1) / 20);
  const extent = (a: number) => (-Math.log1p(-a)) ** (1 / exponent);
  const from = (k: number) => (k === 0 ? 0 : extent(conversions[k - 1]));
  return {
    conversions,
    energyJPerMol: new Float64Array(19).fill(energyJPerMol),
    lnStep: conversions.map((a, k) => Math.log(extent(a) - from(k)) - lnRateAtX0),
    share: Float64Array.from({ length: 99 }, (_, g) => {
      const a = (g + 1) / 100;
      const found = conversions.findIndex((c) => a <= c + 1e-9);
      const k = found < 0 ? 18 : found;
      return (extent(a) - from(k)) / (extent(conversions[k]) - from(k));
    }),
    x0PerK,
  };
}

/** A source with both methods from one law; draws scatter by the standard deviations given, model-free ones together with the shared ones. */
export function sourceOf(
  law: SharedLaw,
  { draws = 100, sdLnRate = 0.05, sdEnergy = 3e3, sdBend = 0.02, sdExponent = 0.03 } = {},
  extra: Partial<ForecastSource> = {},
): ForecastSource {
  const random = createRandom('forecast test');
  const count = (f: () => number) => Float64Array.from({ length: draws }, f);
  const shifts = count(() => random.normal());
  const steeps = count(() => random.normal());
  const modelFree = exactModelFree(law.energyJPerMol, law.lnRateAtMiddle, law.avramiExponent, law.x0PerK);
  const drawn = (of: (d: number, k: number) => number) =>
    Float64Array.from({ length: draws * 19 }, (_, i) => of(Math.floor(i / 19), i % 19));
  return {
    sample: law.sample,
    event: law.event,
    verdict: law.bend === 0 ? 'straight' : 'material',
    degreesOfFreedom: 8,
    lowestMeasuredK: law.lowestMeasuredK,
    highestMeasuredK: law.highestMeasuredK,
    law,
    lawDraws: {
      lnRateAtMiddle: shifts.map((z) => law.lnRateAtMiddle + sdLnRate * z),
      energyJPerMol: steeps.map((z) => law.energyJPerMol + sdEnergy * z),
      bend: count(() => law.bend + sdBend * random.normal()),
      avramiExponent: count(() => law.avramiExponent + sdExponent * random.normal()),
    },
    modelFree,
    modelFreeDraws: {
      energyJPerMol: drawn((d, k) => modelFree.energyJPerMol[k] + sdEnergy * steeps[d]),
      lnStep: drawn((d, k) => modelFree.lnStep[k] - sdLnRate * shifts[d]),
    },
    ...extra,
  };
}

export const programme = (rows: readonly (readonly [number, number])[], name = ''): ProgrammeTable => ({
  name,
  timeS: Float64Array.from(rows, (r) => r[0]),
  temperatureK: Float64Array.from(rows, (r) => r[1]),
});

/** Arrhenius law from E, ln A, measured over a range. */
export function straightLaw(
  energyJPerMol: number,
  lnPrefactor: number,
  exponent: number,
  lowK: number,
  highK: number,
): SharedLaw {
  const x0PerK = (1 / lowK + 1 / highK) / 2;
  return {
    ...LAW,
    lnRateAtMiddle: lnPrefactor - (energyJPerMol / R) * x0PerK,
    energyJPerMol,
    bend: 0,
    x0PerK,
    dxPerK: (1 / lowK - 1 / highK) / 2,
    avramiExponent: exponent,
    frozenBelowK: lowK,
    lowestMeasuredK: lowK,
    highestMeasuredK: highK,
  };
}
