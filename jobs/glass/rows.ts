import type { FlagCode } from '../../schema/wire/flags.ts';
import type { ParameterRow } from '../../schema/wire/parameters.ts';
import { localEnergy } from '../laws/bend.ts';
import { studentQuantile } from '../numeric/distributions.ts';
import { standardDeviation } from '../numeric/statistics.ts';
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

/** E_loc at five temperatures from the lowest to the highest measured, evenly in 1/T, with the draws' intervals. */
export function localEnergyRows(base: RowBase, shared: SharedFit, flags: FlagCode[]): ParameterRow[] {
  const { law, draws, degrees } = shared;
  const t = studentQuantile(0.975, degrees);
  const scale = { x0: law.x0PerK, dx: law.dxPerK };
  const [from, to] = [1 / law.lowestMeasuredK, 1 / law.highestMeasuredK];
  return Array.from({ length: ENERGY_POINTS }, (_, k) => {
    const x = from + ((to - from) * k) / (ENERGY_POINTS - 1);
    const value = localEnergy(x, law.energyJPerMol, law.bend, scale) / 1e3;
    const spread = standardDeviation(
      draws.energyJPerMol.map((e, i) => Math.log(localEnergy(x, e, draws.bend[i], scale))),
    );
    const interval = [value * Math.exp(-t * spread), value * Math.exp(t * spread)] as const;
    return makeParameter(base, 'local_activation_energy', 'shared_law', 'kJ/mol', value, interval, {
      temperature_K: 1 / x,
      flags,
    });
  });
}
