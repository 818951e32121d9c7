import type { FlagCode } from '../../schema/wire/flags.ts';
import type { ParameterRow } from '../../schema/wire/parameters.ts';
import { studentQuantile } from '../numeric/distributions.ts';
import { standardDeviation } from '../numeric/statistics.ts';
import { localEnergyOf } from './shared-law-values.ts';
import type { SharedFit } from './verdict/shared-law.ts';

/** What rows of one event share. */
export interface RowBase {
  sample: string;
  event: number;
  scan_count: number;
  rate_min_K_per_s: number;
  rate_max_K_per_s: number;
}

export function makeParameter(
  base: RowBase,
  quantity: string,
  method: string,
  unit: string,
  value: number,
  interval: readonly [number, number] | undefined,
  rest: Partial<
    Pick<ParameterRow, 'temperature_K' | 'flags' | 'interval' | 'scan_count' | 'rate_min_K_per_s' | 'rate_max_K_per_s'>
  > = {},
): ParameterRow {
  const limit = (v: number | undefined) => (v !== undefined && Number.isFinite(v) ? v : null);
  return {
    ...base,
    quantity,
    method,
    conversion: null,
    temperature_K: null,
    value,
    unit,
    lower95: limit(interval?.[0]),
    upper95: limit(interval?.[1]),
    flags: [],
    interval: 'monte_carlo',
    variant: '',
    ...rest,
  };
}

const ENERGY_POINTS = 5;

/**
 * E_loc at T with its 95 % ends, kJ/mol, even on a log scale. Draws scatter in the bent part; what the driving force takes off is known, and
 * where it is not, the law's shape has an error of its own.
 * @param t Student's quantile for the draws
 */
export function localEnergyBand(
  { law, draws, shapeVariance }: SharedFit,
  t: number,
  T: number,
): { value: number; lower: number; upper: number } {
  const value = localEnergyOf(law, T) / 1e3;
  const u = (1 / T - law.x0PerK) / law.dxPerK;
  const logs = draws.energyJPerMol.map((e, k) => Math.log(e) + draws.bend[k] * u);
  const bent = localEnergyOf({ ...law, driving: undefined }, T) / 1e3;
  const half = (t * Math.hypot(standardDeviation(logs), Math.sqrt(shapeVariance(T))) * bent) / value;
  return { value, lower: value * Math.exp(-half), upper: value * Math.exp(half) };
}

/** E_loc at five temperatures from the lowest to the highest measured, evenly in 1/T, with the draws' intervals. */
export function localEnergyRows(base: RowBase, shared: SharedFit, flags: FlagCode[]): ParameterRow[] {
  const t = studentQuantile(0.975, shared.degrees);
  const [from, to] = [1 / shared.law.lowestMeasuredK, 1 / shared.law.highestMeasuredK];
  return Array.from({ length: ENERGY_POINTS }, (_, k) => {
    const T = 1 / (from + ((to - from) * k) / (ENERGY_POINTS - 1));
    const { value, lower, upper } = localEnergyBand(shared, t, T);
    return makeParameter(base, 'local_activation_energy', 'shared_law', 'kJ/mol', value, [lower, upper], {
      temperature_K: T,
      flags,
    });
  });
}
