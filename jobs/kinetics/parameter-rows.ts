import type { FlagCode } from '../../schema/wire/flags.ts';
import type { ParameterRow } from '../../schema/wire/parameters.ts';
import { studentQuantile } from '../numeric/distributions.ts';
import { mean, standardDeviation } from '../numeric/statistics.ts';
import { type DrawCauses, DrawSpread } from './draw-spread.ts';
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

  constructor(
    private readonly sample: string,
    private readonly data: EventData,
    private readonly curves: Uint16Array,
    model: ScatterModel,
    private readonly drawn: Estimates[],
    causes: readonly DrawCauses[],
  ) {
    this.spread = new DrawSpread(causes, data.n - model.trendParameters, scanDegrees(model));
  }

  /**
   * A row with the Monte Carlo interval: estimate ± t × spread of the draws (`DrawSpread`), on a log scale for positive quantities.
   * @param scale of the unit printed, e.g. 1e-3 for kJ
   */
  private add(
    where: Where,
    of: (e: Estimates) => number,
    estimate: Estimates,
    scale: number,
    log: boolean,
    onCurves: boolean,
  ): void {
    const drawn = this.drawn.map((d) => of(d) * scale);
    this.addDrawn(where, of(estimate) * scale, drawn, log, onCurves);
  }

  /** A row with the Monte Carlo interval from values in the unit printed; nothing for a value that is not finite. */
  addDrawn(where: Where, value: number, drawn: number[], log: boolean, onCurves: boolean): void {
    if (!Number.isFinite(value)) return;
    const half = this.spread.halfWidth(log ? drawn.map(Math.log) : drawn);
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
    const rates = onCurves ? Array.from(this.curves, (i) => this.data.rate[i]) : Array.from(this.data.rate);
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
    const energy = (
      method: string,
      of: (e: Estimates) => number,
      line: EnergyEstimate,
      variant: ParameterRow['variant'] = '',
    ) => {
      const where = { quantity: 'activation_energy', method, unit: 'kJ/mol', variant };
      this.add(where, of, e, 1e-3, true, false);
      if (this.data.n > 2) {
        const half = studentQuantile(0.975, this.data.n - 2) * line.energyError * 1e-3;
        const value = line.energy * 1e-3;
        this.push(where, value, [value - half, value + half], 'student_t', false);
      }
    };
    energy('kissinger', (v) => v.kissinger, fitEnergyLine(rate, peakK, KISSINGER.power, KISSINGER.factor, s.weights));
    if (s.augisBennett) {
      energy('augis_bennett', (v) => v.augisBennett, fitAugisBennett(rate, peakK, rampStartK, s.weights));
    }
    energy('boswell', (v) => v.boswell, fitEnergyLine(rate, peakK, BOSWELL.power, BOSWELL.factor, s.weights));
    energy('ozawa_flynn_wall', (v) => v.ozawaFlynnWall, fitOzawaFlynnWall(rate, peakK, s.weights), 'peak');
    const prefactor = { quantity: 'ln_prefactor', method: 'kissinger', unit: 'ln(1/s)' };
    this.add(prefactor, (v) => v.kissingerLnPrefactor, e, 1, false, false);
    const exponent = { quantity: 'avrami_exponent', method: 'augis_bennett', unit: '1' };
    this.add(exponent, (v) => v.augisBennettExponent, e, 1, true, false);
  }

  /** @param determined conversions that enough rates are usable at: the others get no row */
  curveRows(e: Estimates, pooledFlags: FlagCode[], determined: readonly boolean[]): void {
    const methods: [string, (e: Estimates) => Float64Array][] = [
      ['friedman', (v) => v.friedman],
      ['kissinger_akahira_sunose', (v) => v.kissingerAkahiraSunose],
      ['starink', (v) => v.starink],
      ['ozawa_flynn_wall', (v) => v.ozawaFlynnWallCurve],
      ['vyazovkin', (v) => v.vyazovkin],
    ];
    for (const [method, of] of methods) {
      const where = { quantity: 'activation_energy', method, unit: 'kJ/mol' };
      this.add({ ...where, flags: pooledFlags }, (v) => pooledMean(of(v), determined), e, 1e-3, true, true);
      CONVERSIONS.forEach((conversion, k) => {
        if (determined[k]) this.add({ ...where, conversion }, (v) => of(v)[k], e, 1e-3, true, true);
      });
    }
    if (!e.jmak) return;
    const of = (pick: (j: NonNullable<Estimates['jmak']>) => number) => (v: Estimates) =>
      v.jmak ? pick(v.jmak) : Number.NaN;
    this.add(
      { quantity: 'activation_energy', method: 'jmak', unit: 'kJ/mol' },
      of((j) => j.energy),
      e,
      1e-3,
      true,
      true,
    );
    this.add(
      { quantity: 'ln_prefactor', method: 'jmak', unit: 'ln(1/s)' },
      of((j) => j.lnPrefactor),
      e,
      1,
      false,
      true,
    );
    this.add(
      { quantity: 'avrami_exponent', method: 'jmak', unit: '1' },
      of((j) => j.exponent),
      e,
      1,
      true,
      true,
    );
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
