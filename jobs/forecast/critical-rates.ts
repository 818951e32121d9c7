import { type Flag, type FlagCode, flag } from '../../schema/wire/flags.ts';
import type { ForecastSource, MeltingData } from '../../schema/wire/forecasts.ts';
import type { ParameterRow } from '../../schema/wire/parameters.ts';
import type { SharedLaw } from '../../schema/wire/shared-law.ts';
import { type Band, bandOf, expFinite } from './band.ts';
import { extentOf } from './kinetics.ts';
import { COARSE, FINE, type GaussRule, layPanels, lnIntegralAlong, type Panels } from './programme.ts';
import { drawnParameters, type RateCurve, sharedRateCurve } from './rate-curve.ts';
import { findFastest } from './shared-kinetics.ts';

/** Conversion that counts as crystallised unless another is set. */
export const CRITICAL_CONVERSION = 0.01;

export interface CriticalRates {
  /** K/s; the band in the same unit */
  heatingKPerS: { value: number; lower95: number | null; upper95: number | null };
  /** Only where the driving force is known; an indication from heating data */
  coolingKPerS?: { value: number; lower95: number | null; upper95: number | null };
  /** The nose of the transformation diagram: where crystallisation is fastest, K, and the time to the conversion there, s */
  nose?: { temperatureK: number; timeS: number };
  flags: Flag[];
}

/**
 * The rate at which heating from the cold glass to melting, or cooling back, just reaches a conversion X:
 * β_c = |∫K dT|/[−ln(1 − X)]^(1/n) over all temperatures below melting (the nose formula is never used). The two have one value,
 * but heating data count the nuclei that the quench left, so the cooling rate is an indication only. Undefined without a melting temperature.
 */
export function findCriticalRates(source: ForecastSource, conversion = CRITICAL_CONVERSION): CriticalRates | undefined {
  const { law, lawDraws, melting, sample, event } = source;
  if (!law || !melting) return undefined;
  const curve = sharedRateCurve(law, law, melting);
  const panels = meltingRamp(curve, law, melting, FINE);
  const lnRate = (of: RateCurve, along: Panels) =>
    lnIntegralAlong(along, of.lnRate) - extentOf(conversion) / of.exponent;
  // A draw's exponent moves a little more or less over a panel than the estimate's; three nodes bear twice the span.
  const coarse = meltingRamp(curve, law, melting, COARSE);
  const drawn = new Float64Array(lawDraws?.bend.length ?? 0);
  for (let d = 0; d < drawn.length; d++)
    drawn[d] = lnRate(sharedRateCurve(law, drawnParameters(lawDraws!, d), melting), coarse);
  const heatingKPerS = spread(bandOf(lnRate(curve, panels), drawn, source.degreesOfFreedom));
  const where = { sample, event };
  if (melting.enthalpyJPerMol === undefined) {
    const detail = `No enthalpy of melting per mole: the driving force up to ${melting.meltingK.toFixed(0)} K counts as full, so the critical heating rate is too high, and no critical cooling rate is given.`;
    const action = 'Give the enthalpy of melting and the molar mass in samples.csv.';
    return { heatingKPerS, flags: [flag('driving-force-ignored', detail, action, where)] };
  }
  const temperatureK = findFastest(curve.lnRate, law.lowestMeasuredK, melting.meltingK);
  const timeS = expFinite(extentOf(conversion) / law.avramiExponent - curve.lnRate(temperatureK));
  const detail = `The critical cooling rate rests on heating data, which count the nuclei of the quench; its law reaches up to ${law.highestMeasuredK.toFixed(0)} K and is carried on to melting at ${melting.meltingK.toFixed(0)} K.`;
  const flags = [
    flag('quench-nuclei', detail, 'Take it as an order of magnitude; measure on cooling from the melt.', where),
  ];
  return { heatingKPerS, coolingKPerS: heatingKPerS, nose: { temperatureK, timeS }, flags };
}

/** A ramp of 1 K/s from the cold to melting, along which the integral of K over time is ∫K dT over all temperatures. */
function meltingRamp(curve: RateCurve, law: SharedLaw, { meltingK }: MeltingData, rule: GaussRule): Panels {
  const fromK = coldEnd(curve, law.lowestMeasuredK);
  const ramp = {
    name: '',
    timeS: Float64Array.of(0, meltingK - fromK),
    temperatureK: Float64Array.of(fromK, meltingK),
  };
  return layPanels(ramp, curve.steepness, curve.breaksK, rule);
}

/** A temperature below which less than e^−40 of the rate at `fromK` is left. */
export function coldEnd(curve: RateCurve, fromK: number): number {
  const top = curve.lnRate(fromK);
  let T = fromK;
  while (T > 20 && curve.lnRate(T) > top - 40) T *= 0.95;
  return T;
}

const spread = ({ value, lower, upper }: Band) => ({
  value: expFinite(value),
  lower95: lower === undefined ? null : expFinite(lower),
  upper95: upper === undefined ? null : expFinite(upper),
});

/** The critical rates as rows of the consolidated table. @param scans what the law rests on */
export function criticalRateRows(
  source: ForecastSource,
  scans: { count: number; rateMinKPerS: number; rateMaxKPerS: number },
  conversion = CRITICAL_CONVERSION,
): { parameters: ParameterRow[]; flags: Flag[] } {
  const found = findCriticalRates(source, conversion);
  if (!found) return { parameters: [], flags: [] };
  const codes = found.flags.map((f) => f.code);
  const row = (quantity: string, rate: CriticalRates['heatingKPerS'], flags: FlagCode[]): ParameterRow => ({
    sample: source.sample,
    event: source.event,
    quantity,
    method: 'shared_law',
    conversion,
    temperature_K: null,
    ...rate,
    unit: 'K/s',
    scan_count: scans.count,
    rate_min_K_per_s: scans.rateMinKPerS,
    rate_max_K_per_s: scans.rateMaxKPerS,
    flags,
    interval: 'monte_carlo',
    variant: '',
  });
  const heating = row(
    'critical_heating_rate',
    found.heatingKPerS,
    codes.filter((c) => c === 'driving-force-ignored'),
  );
  const parameters = [heating];
  if (found.coolingKPerS) parameters.push(row('critical_cooling_rate', found.coolingKPerS, codes));
  // The conversion of these rows is empty; only another than the usual one is said.
  if (conversion === CRITICAL_CONVERSION) for (const r of parameters) r.conversion = null;
  return { parameters, flags: found.flags };
}
