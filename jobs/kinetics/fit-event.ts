import { type Flag, type FlagCode, flag } from '../../schema/wire/flags.ts';
import type { FitReport, FitScan, ParameterRow } from '../../schema/wire/parameters.ts';
import type { InstrumentCalibration } from '../../schema/wire/scan.ts';
import { studentQuantile } from '../numeric/distributions.ts';
import type { Random } from '../numeric/random.ts';
import { mean, median, robustSigma, standardDeviation } from '../numeric/statistics.ts';
import {
  createEstimator,
  type EstimateSettings,
  type Estimates,
  measuredIntegrals,
  rampIntegrals,
} from './estimate.ts';
import { CONVERSIONS, collectEvent, distinctRates, type EventData, POOLED } from './event-data.ts';
import { drawBuffer, drawColumns, modelScatter, type ScatterModel } from './monte-carlo.ts';
import {
  BOSWELL,
  type EnergyEstimate,
  fitAugisBennett,
  fitEnergyLine,
  fitOzawaFlynnWall,
  KISSINGER,
  LATEST_START,
} from './peak-methods.ts';

export interface EventFit {
  parameters: ParameterRow[];
  reports: FitReport[];
  flags: Flag[];
}

/** Fewer distinct rates than this and no method applies (ICTAC 2011: at least three programmes). */
export const LEAST_RATES = 3;
/** E(α) that varies by more than this part of its mean over 0.1 … 0.9 raises `energy-varies` when its interval bears it (ICTAC 2011). */
const ENERGY_VARIES = 0.1;
/** A scan this many robust sigmas from the trend is told. */
const OUTLIER_SIGMAS = 4;
/** A global JMAK fit with a residual above this in α does not describe the curves. */
const JMAK_RESIDUAL = 0.03;

/** All estimates of one event with their intervals. The caller has made sure of three distinct rates. */
export function fitEvent(
  sample: string,
  event: number,
  scans: FitScan[],
  calibrations: InstrumentCalibration[],
  random: Random,
  draws: number,
): EventFit {
  const data = collectEvent(event, scans, calibrations);
  const where = { sample, event };
  const flags: Flag[] = [];
  const curves = Uint16Array.from(Array.from(data.hasCurve.keys()).filter((i) => data.hasCurve[i] === 1));
  const curveRates = distinctRates(Array.from(curves, (i) => data.rate[i]));
  const curveMethods = curveRates.length >= LEAST_RATES;
  const model = modelScatter(data, curves, distinctRates(data.rate).length);
  const late = data.scans.findIndex((_, i) => data.rampStartK[i] > LATEST_START * data.peakK[i]);
  const settings: EstimateSettings = {
    curves,
    weights: model.weights,
    curveWeights: Float64Array.from(curves, (i) => model.weights[i]),
    augisBennett: late < 0,
    curveMethods,
    x0: mean(Array.from(curves.length ? curves : data.scans.keys(), (i) => 1 / data.peakK[i])),
  };
  if (late >= 0) {
    flags.push(
      flag(
        'start-too-near',
        `The ramp of ${data.scans[late].file} starts at ${data.rampStartK[late].toFixed(0)} K, above ${LATEST_START} of the peak at ${data.peakK[late].toFixed(0)} K; Augis–Bennett’s energy was not computed.`,
        'Start the ramp lower if this method is wanted; the other methods do not need it.',
        where,
      ),
    );
  }
  if (!curveMethods) {
    flags.push(
      flag(
        'few-rates',
        `Only ${curveRates.length} distinct rates have usable conversion curves (3 are needed, 5 recommended); peak methods alone were run.`,
        'Add scans with more points over the event, or scan further beyond it.',
        where,
      ),
    );
  }

  const estimate = createEstimator(data, settings, measuredIntegrals(data, curves))();
  const drawn = runDraws(model, settings, estimate, random, draws);
  flags.push(...outliers(model, where));
  const builder = new RowBuilder(sample, data, curves, model, drawn);
  builder.peakRows(estimate, settings);
  if (curveMethods) {
    const varies = energyVaries(estimate, drawn, model, where);
    if (varies) flags.push(varies);
    builder.curveRows(estimate, varies ? ['energy-varies'] : []);
    flags.push(...judgeJmak(estimate, where));
  }
  builder.enthalpyRow();
  return { parameters: builder.rows, reports: reportFits(event, estimate, curves.length), flags };
}

function runDraws(
  model: ScatterModel,
  settings: EstimateSettings,
  estimate: Estimates,
  random: Random,
  draws: number,
): Estimates[] {
  const columns = drawBuffer(model.data);
  const estimator = createEstimator(columns, settings, rampIntegrals(columns, settings.curves));
  const warm = estimate.jmak?.fit.parameters;
  const out: Estimates[] = [];
  for (let d = 0; d < draws; d++) {
    drawColumns(model, random, columns);
    out.push(estimator(warm));
  }
  return out;
}

function outliers(model: ScatterModel, where: { sample: string; event: number }): Flag[] {
  const { data, peak } = model;
  const standardised = peak.residuals.map(
    (r, i) => r / (model.sigmaK[data.instrument[i]] * Math.sqrt(1 - peak.leverage[i])),
  );
  // The scatter of the other scans, not of all: one wild scan must not hide behind the scatter it makes.
  const sigma = robustSigma(standardised);
  const centre = median(standardised);
  const out: Flag[] = [];
  data.scans.forEach((s, i) => {
    const far = Math.abs(standardised[i] - centre) / sigma;
    const K = peak.residuals[i];
    if (data.n >= 6 && far > OUTLIER_SIGMAS && Math.abs(K) > 0.02 * data.widthK[i]) {
      out.push(
        flag(
          'outlier',
          `The peak of this scan lies ${K.toFixed(2)} K from the trend of the others, ${far.toFixed(1)} robust sigmas (limit ${OUTLIER_SIGMAS}).`,
          'Look at the scan; exclude it with a reason if it is at fault.',
          { ...where, file: s.file, instrument: s.instrument },
        ),
      );
    }
  });
  return out;
}

function energyVaries(
  estimate: Estimates,
  drawn: Estimates[],
  model: ScatterModel,
  where: { sample: string; event: number },
): Flag | undefined {
  const E = estimate.vyazovkin.subarray(POOLED.from, POOLED.to);
  let high = 0;
  let low = 0;
  E.forEach((e, k) => {
    if (e > E[high]) high = k;
    if (e < E[low]) low = k;
  });
  const range = E[high] - E[low];
  const middle = mean(E);
  const spread = standardDeviation(drawn.map((d) => d.vyazovkin[POOLED.from + high] - d.vyazovkin[POOLED.from + low]));
  const error = studentQuantile(0.975, Math.max(1, model.curves.length - model.trendParameters)) * spread;
  if (!(range > ENERGY_VARIES * middle && range > error)) return undefined;
  const at = (k: number) => CONVERSIONS[POOLED.from + k].toFixed(2);
  return flag(
    'energy-varies',
    `E goes from ${(E[low] / 1e3).toFixed(1)} kJ/mol at α = ${at(low)} to ${(E[high] / 1e3).toFixed(1)} at α = ${at(high)}, ${((100 * range) / middle).toFixed(0)} % of its mean (limit 10 %) and more than its interval ${(error / 1e3).toFixed(1)}. Open causes: more than one step, a bent rate law, a response of the instrument left in.`,
    'Do not use one E for a forecast; look at E(α) and at the instruments’ response times.',
    where,
  );
}

function judgeJmak(estimate: Estimates, where: { sample: string; event: number }): Flag[] {
  const { jmak } = estimate;
  if (!jmak) return [];
  if (!jmak.fit.converged) {
    return [
      flag(
        'fit-not-converged',
        `The global JMAK fit stopped: ${jmak.fit.message}.`,
        'Treat its numbers as a guide only; look at the curves for damage.',
        where,
      ),
    ];
  }
  if (jmak.residualRms > JMAK_RESIDUAL) {
    return [
      flag(
        'not-avrami',
        `One JMAK law with one energy leaves a residual of ${jmak.residualRms.toFixed(3)} in conversion (limit ${JMAK_RESIDUAL}).`,
        'Use the isoconversional energies; its n and E describe no single process. A rate law that bends over many decades does this too.',
        where,
      ),
    ];
  }
  return [];
}

function reportFits(event: number, e: Estimates, curveScans: number): FitReport[] {
  const out: FitReport[] = [];
  if (e.jmak) {
    const { fit, residualRms } = e.jmak;
    out.push({
      event,
      method: 'jmak',
      converged: fit.converged,
      message: fit.message,
      evaluations: fit.evaluations,
      residualRms,
      rows: curveScans * CONVERSIONS.length,
    });
  }
  return out;
}

/** Turns estimates and draws into table rows. */
class RowBuilder {
  readonly rows: ParameterRow[] = [];
  private readonly t: number;

  constructor(
    private readonly sample: string,
    private readonly data: EventData,
    private readonly curves: Uint16Array,
    model: ScatterModel,
    private readonly drawn: Estimates[],
  ) {
    this.t = studentQuantile(0.975, Math.max(1, data.n - model.trendParameters));
  }

  /**
   * A row with the Monte Carlo interval: estimate ± t(0.975, n − p) × spread of the draws, on a log scale for positive quantities.
   * @param scale of the unit printed, e.g. 1e-3 for kJ
   */
  private add(
    where: {
      quantity: string;
      method: string;
      unit: string;
      conversion?: number;
      variant?: ParameterRow['variant'];
      flags?: FlagCode[];
    },
    of: (e: Estimates) => number,
    estimate: Estimates,
    scale: number,
    log: boolean,
    onCurves: boolean,
  ): void {
    const value = of(estimate) * scale;
    if (!Number.isFinite(value)) return;
    const spread = standardDeviation(this.drawn.map((d) => (log ? Math.log(of(d) * scale) : of(d) * scale)));
    const bounded = Number.isFinite(spread) && (!log || value > 0);
    this.push(
      where,
      value,
      bounded
        ? log
          ? [value * Math.exp(-this.t * spread), value * Math.exp(this.t * spread)]
          : [value - this.t * spread, value + this.t * spread]
        : undefined,
      'monte_carlo',
      onCurves,
    );
  }

  private push(
    where: {
      quantity: string;
      method: string;
      unit: string;
      conversion?: number;
      variant?: ParameterRow['variant'];
      flags?: FlagCode[];
    },
    value: number,
    interval: readonly [number, number] | undefined,
    kind: ParameterRow['interval'],
    onCurves: boolean,
  ): void {
    const rates = onCurves ? Array.from(this.curves, (i) => this.data.rate[i]) : Array.from(this.data.rate);
    this.rows.push({
      sample: this.sample,
      event: this.data.event,
      quantity: where.quantity,
      method: where.method,
      conversion: where.conversion ?? null,
      temperature_K: null,
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

  curveRows(e: Estimates, pooledFlags: FlagCode[]): void {
    const methods: [string, (e: Estimates) => Float64Array][] = [
      ['friedman', (v) => v.friedman],
      ['kissinger_akahira_sunose', (v) => v.kissingerAkahiraSunose],
      ['starink', (v) => v.starink],
      ['ozawa_flynn_wall', (v) => v.ozawaFlynnWallCurve],
      ['vyazovkin', (v) => v.vyazovkin],
    ];
    for (const [method, of] of methods) {
      const where = { quantity: 'activation_energy', method, unit: 'kJ/mol' };
      this.add(
        { ...where, flags: pooledFlags },
        (v) => mean(of(v).subarray(POOLED.from, POOLED.to)),
        e,
        1e-3,
        true,
        true,
      );
      CONVERSIONS.forEach((conversion, k) => {
        this.add({ ...where, conversion }, (v) => of(v)[k], e, 1e-3, true, true);
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
