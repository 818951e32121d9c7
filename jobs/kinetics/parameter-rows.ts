import type { FlagCode } from '../../schema/wire/flags.ts';
import type { ParameterRow } from '../../schema/wire/parameters.ts';
import { studentQuantile } from '../numeric/distributions.ts';
import { mean, standardDeviation } from '../numeric/statistics.ts';
import { type DrawCauses, DrawSpread } from './draw-spread.ts';
import type { DrawnColumns } from './drawn-columns.ts';
import type { EstimateSettings, Estimates } from './estimate.ts';
import { CONVERSIONS, type EventData, pooledMean } from './event-data.ts';
import { type ScatterModel, scanDegrees } from './monte-carlo.ts';
import {
  BOSWELL,
  type EnergyEstimate,
  fitAugisBennett,
  fitEnergyLine,
  fitOzawaFlynnWall,
  KISSINGER,
} from './peak-methods.ts';

export interface Where {
  quantity: string;
  method: string;
  unit: string;
  conversion?: number;
  variant?: ParameterRow['variant'];
  flags?: FlagCode[];
  temperatureK?: number;
}

/** Turns estimates and draws into table rows. */
export class RowBuilder {
  readonly rows: ParameterRow[] = [];
  private readonly spread: DrawSpread;
  /** K/s */
  private readonly rates: number[];
  private readonly curveRates: number[];

  constructor(
    private readonly sample: string,
    private readonly data: EventData,
    curves: Uint16Array,
    model: ScatterModel,
    private readonly drawn: DrawnColumns,
    causes: readonly DrawCauses[],
  ) {
    this.spread = new DrawSpread(causes, data.n - model.trendParameters, scanDegrees(model));
    this.rates = Array.from(data.rate);
    this.curveRates = Array.from(curves, (i) => data.rate[i]);
  }

  /**
   * A row with the Monte Carlo interval: estimate ± t × spread of the draws (`DrawSpread`), on a log scale for positive quantities;
   * nothing for a value that is not finite.
   * @param drawn the draws' values   @param scale of the unit printed, e.g. 1e-3 for kJ
   */
  add(where: Where, estimate: number, drawn: Float64Array, scale: number, log: boolean, onCurves: boolean): void {
    const value = estimate * scale;
    if (!Number.isFinite(value)) return;
    const values = new Float64Array(drawn.length);
    for (let d = 0; d < values.length; d++) values[d] = log ? Math.log(drawn[d] * scale) : drawn[d] * scale;
    const half = this.spread.halfWidth(values);
    const bounded = Number.isFinite(half) && (!log || value > 0);
    this.push(
      where,
      value,
      bounded ? (log ? [value * Math.exp(-half), value * Math.exp(half)] : [value - half, value + half]) : undefined,
      'monte_carlo',
      onCurves,
    );
  }

  push(
    where: Where,
    value: number,
    interval: readonly [number, number] | undefined,
    kind: ParameterRow['interval'],
    onCurves: boolean,
  ): void {
    // A table of peaks alone has no widths and no start of the ramp: what needs them is missing, not a number.
    if (!Number.isFinite(value)) return;
    const rates = onCurves ? this.curveRates : this.rates;
    this.rows.push({
      sample: this.sample,
      event: this.data.event,
      quantity: where.quantity,
      method: where.method,
      conversion: where.conversion ?? null,
      temperature_K: where.temperatureK ?? null,
      value,
      unit: where.unit,
      lower95: interval ? interval[0] : null,
      upper95: interval ? interval[1] : null,
      scan_count: rates.length,
      rate_min_K_per_s: Math.min(...rates),
      rate_max_K_per_s: Math.max(...rates),
      flags: where.flags ?? [],
      interval: kind,
      variant: where.variant ?? '',
    });
  }

  peakRows(e: Estimates, s: EstimateSettings): void {
    const { rate, peakK, rampStartK } = this.data;
    const drawn = this.drawn.peak;
    const energy = (
      method: string,
      of: keyof DrawnColumns['peak'],
      line: EnergyEstimate,
      variant: ParameterRow['variant'] = '',
    ) => {
      const where = { quantity: 'activation_energy', method, unit: 'kJ/mol', variant };
      this.add(where, e[of], drawn[of], 1e-3, true, false);
      if (this.data.n > 2) {
        const half = studentQuantile(0.975, this.data.n - 2) * line.energyError * 1e-3;
        const value = line.energy * 1e-3;
        this.push(where, value, [value - half, value + half], 'student_t', false);
      }
    };
    energy('kissinger', 'kissinger', fitEnergyLine(rate, peakK, KISSINGER.power, KISSINGER.factor, s.weights));
    if (s.augisBennett) energy('augis_bennett', 'augisBennett', fitAugisBennett(rate, peakK, rampStartK, s.weights));
    energy('boswell', 'boswell', fitEnergyLine(rate, peakK, BOSWELL.power, BOSWELL.factor, s.weights));
    energy('ozawa_flynn_wall', 'ozawaFlynnWall', fitOzawaFlynnWall(rate, peakK, s.weights), 'peak');
    const prefactor = { quantity: 'ln_prefactor', method: 'kissinger', unit: 'ln(1/s)' };
    this.add(prefactor, e.kissingerLnPrefactor, drawn.kissingerLnPrefactor, 1, false, false);
    const exponent = { quantity: 'avrami_exponent', method: 'augis_bennett', unit: '1' };
    this.add(exponent, e.augisBennettExponent, drawn.augisBennettExponent, 1, true, false);
  }

  /** @param determined conversions that enough rates are usable at: the others get no row */
  curveRows(e: Estimates, pooledFlags: FlagCode[], determined: readonly boolean[]): void {
    const { drawn } = this;
    const methods = [
      ['friedman', 'friedman'],
      ['kissinger_akahira_sunose', 'kissingerAkahiraSunose'],
      ['starink', 'starink'],
      ['ozawa_flynn_wall', 'ozawaFlynnWallCurve'],
      ['vyazovkin', 'vyazovkin'],
    ] as const;
    for (const [method, of] of methods) {
      const where = { quantity: 'activation_energy', method, unit: 'kJ/mol' };
      const column = drawn.curve[of];
      const pooled = drawn.pooled(column, determined);
      this.add({ ...where, flags: pooledFlags }, pooledMean(e[of], determined), pooled, 1e-3, true, true);
      CONVERSIONS.forEach((conversion, k) => {
        if (determined[k])
          this.add({ ...where, conversion }, e[of][k], drawn.atConversion(column, k), 1e-3, true, true);
      });
    }
    if (!e.jmak) return;
    const { energy, lnPrefactor, exponent } = drawn.jmak;
    const row = (quantity: string, unit: string) => ({ quantity, method: 'jmak', unit });
    this.add(row('activation_energy', 'kJ/mol'), e.jmak.energy, energy, 1e-3, true, true);
    this.add(row('ln_prefactor', 'ln(1/s)'), e.jmak.lnPrefactor, lnPrefactor, 1, false, true);
    this.add(row('avrami_exponent', '1'), e.jmak.exponent, exponent, 1, true, true);
  }

  /** Mean enthalpy of the scans with a known mass, with Student's interval of the mean. */
  enthalpyRow(): void {
    const values = this.data.scans.flatMap((s) =>
      s.event.enthalpyJPerKg === undefined ? [] : [s.event.enthalpyJPerKg * 1e-3],
    );
    if (values.length === 0) return;
    const value = mean(values);
    const half =
      values.length > 1
        ? (studentQuantile(0.975, values.length - 1) * standardDeviation(values)) / Math.sqrt(values.length)
        : undefined;
    this.push(
      { quantity: 'enthalpy', method: 'area', unit: 'J/g' },
      value,
      half === undefined ? undefined : [value - half, value + half],
      'student_t',
      false,
    );
    const row = this.rows[this.rows.length - 1];
    row.scan_count = values.length;
  }
}
