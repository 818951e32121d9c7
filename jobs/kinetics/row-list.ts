import type { FlagCode } from '../../schema/wire/flags.ts';
import type { ParameterRow } from '../../schema/wire/parameters.ts';
import { studentQuantile } from '../numeric/distributions.ts';
import { standardDeviation } from '../numeric/statistics.ts';
import { CONVERSIONS, type EventData, pooledMean } from './event-data.ts';
import type { ProgrammeEstimates, ProgrammeFit } from './isoconversional/programmes.ts';

export interface RowOptions {
  conversion?: number;
  temperatureK?: number;
  flags?: FlagCode[];
  interval?: ParameterRow['interval'];
}

/** Makes rows of one event whose scans are not all heating ramps. Rates are those of its scans, |β|. */
export class RowList {
  readonly rows: ParameterRow[] = [];

  constructor(
    private readonly sample: string,
    private readonly event: number,
    private readonly data: EventData,
  ) {}

  /** A row with given limits. */
  push(
    quantity: string,
    method: string,
    unit: string,
    value: number,
    limits: readonly [number, number] | undefined,
    o: RowOptions = {},
  ): void {
    if (!Number.isFinite(value)) return;
    const rates = Array.from(this.data.rate, Math.abs);
    this.rows.push({
      sample: this.sample,
      event: this.event,
      quantity,
      method,
      conversion: o.conversion ?? null,
      temperature_K: o.temperatureK ?? null,
      value,
      unit,
      lower95: limits && Number.isFinite(limits[0]) ? limits[0] : null,
      upper95: limits && Number.isFinite(limits[1]) ? limits[1] : null,
      scan_count: this.data.n,
      rate_min_K_per_s: Math.min(...rates),
      rate_max_K_per_s: Math.max(...rates),
      flags: o.flags ?? [],
      interval: o.interval ?? 'monte_carlo',
      variant: '',
    });
  }

  /** Monte Carlo limits: estimate ± t(0.975, degrees) × spread of the draws, on a log scale where all are positive. */
  drawn(
    quantity: string,
    method: string,
    unit: string,
    value: number,
    draws: number[],
    degrees: number,
    o: RowOptions = {},
  ): void {
    const t = studentQuantile(0.975, Math.max(1, degrees));
    const log = value > 0 && draws.every((v) => v > 0);
    const half = t * standardDeviation(log ? draws.map(Math.log) : draws);
    const limits = log ? [value * Math.exp(-half), value * Math.exp(half)] : [value - half, value + half];
    this.push(quantity, method, unit, value, [limits[0], limits[1]], o);
  }

  /** E(α) and its mean over 0.1 … 0.9 by Friedman and incremental Vyazovkin; no row where too few programmes are usable. */
  programmes({ estimate, drawn, counts }: ProgrammeFit, pooledFlags: FlagCode[]): void {
    for (const method of ['friedman', 'vyazovkin'] as const) {
      const { scans, determined } = counts[method];
      const row = (of: (p: ProgrammeEstimates) => number, count: number, o: RowOptions) =>
        this.drawn('activation_energy', method, 'kJ/mol', of(estimate), drawn.map(of), count - 2, o);
      row((p) => pooledMean(p[method], determined) * 1e-3, pooledMean(scans, determined), { flags: pooledFlags });
      for (const [k, conversion] of CONVERSIONS.entries())
        if (determined[k]) row((p) => p[method][k] * 1e-3, scans[k], { conversion });
    }
  }
}
