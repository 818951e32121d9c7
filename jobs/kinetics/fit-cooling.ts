import { flag } from '../../schema/wire/flags.ts';
import type { FitReport, FitScan } from '../../schema/wire/parameters.ts';
import type { InstrumentCalibration } from '../../schema/wire/scan.ts';
import { fitLine } from '../numeric/line.ts';
import type { Random } from '../numeric/random.ts';
import { fitOzawa, ozawaTemperatures } from './avrami/ozawa.ts';
import {
  CONVERSION_COUNT,
  collectEvent,
  distinctRates,
  type EventColumns,
  type EventData,
  LEAST_RATES,
} from './event-data.ts';
import type { EventFit } from './fit-event.ts';
import { fitProgrammes } from './isoconversional/programmes.ts';
import { COOLING_BRACKET } from './isoconversional/vyazovkin.ts';
import { drawCalibration } from './monte-carlo.ts';
import { RowList } from './row-list.ts';

const NOT_COMPUTED =
  'Kissinger, Ozawa, Augis–Bennett, Boswell, Kissinger–Akahira–Sunose, Starink, Ozawa–Flynn–Wall and JMAK on ramps do not apply to cooling';

/**
 * Cooling scans of one event: Friedman, incremental Vyazovkin down to −1000 kJ/mol, and Ozawa 1971.
 * @param event its number in the table   @param asReduced its number on the scans: another where heating scans have that number too
 */
export function fitCooling(
  sample: string,
  event: number,
  asReduced: number,
  scans: FitScan[],
  calibrations: InstrumentCalibration[],
  random: Random,
  draws: number,
): EventFit {
  const where = { sample, event };
  const withCurves = scans
    .filter((s) => s.event.curve)
    .map((s) => ({ ...s, event: { ...s.event, rateKPerS: -Math.abs(s.event.rateKPerS) } }));
  const rates = distinctRates(withCurves.map((s) => -s.event.rateKPerS));
  const flags = [
    flag(
      'cooling',
      `${scans.length} cooling scan${scans.length === 1 ? '' : 's'} of event ${event}${event === asReduced ? '' : ` (${asReduced} on the scans, a number that the heating scans keep)`}: ${NOT_COMPUTED}; Friedman, incremental Vyazovkin and Ozawa’s exponent are given.`,
      'Read E as an effective energy of the temperature range: it falls below zero near melting and says nothing of a barrier.',
      where,
    ),
  ];
  const report = (method: string, converged: boolean, message: string, rows: number): FitReport => {
    return { event, method, converged, message, evaluations: 0, residualRms: null, rows };
  };
  if (rates.length < LEAST_RATES) {
    const detail = `Event ${event} was measured at ${rates.length} distinct cooling rate${rates.length === 1 ? '' : 's'} with conversion curves; at least 3 are needed, 5 recommended.`;
    flags.push(flag('few-rates', detail, 'Run the missing cooling rates.', where));
    return { parameters: [], reports: [report('friedman', false, detail, 0)], flags };
  }
  const data = collectEvent(event, withCurves, calibrations);
  const fit = fitProgrammes(data, COOLING_BRACKET, random, draws);
  const converged = fit.estimate.converged && fit.counts.vyazovkin.determined.some(Boolean);
  const list = new RowList(sample, event, data);
  list.programmes(fit, ['cooling']);
  const curves = Uint16Array.from(data.scans.keys());
  const lnRate = data.rate.map((b) => Math.log(-b));
  const weights = new Float64Array(data.n).fill(1);
  const temperatures = ozawaTemperatures(data, curves);
  const rows = data.n * CONVERSION_COUNT;
  const reports = [
    report('kissinger', false, NOT_COMPUTED, data.n),
    report(
      'vyazovkin',
      converged,
      converged ? 'cooling ramps' : 'no minimum between −1000 and 1000 kJ/mol at some conversion',
      rows,
    ),
  ];
  if (temperatures.length > 0) {
    const value = fitOzawa(data, curves, lnRate, weights, temperatures);
    const values = drawTemperatures(data, lnRate, random, draws).map((d) =>
      fitOzawa(d, curves, lnRate, weights, temperatures),
    );
    list.drawn('avrami_exponent', 'ozawa', '1', value, values.filter(Number.isFinite), data.n - 2, {
      flags: ['cooling'],
    });
    const [low, high] = [Math.min(...temperatures), Math.max(...temperatures)];
    reports.push(
      report(
        'ozawa',
        true,
        `common slope over ${temperatures.length} temperatures from ${low.toFixed(1)} to ${high.toFixed(1)} K`,
        rows,
      ),
    );
  } else {
    const reason = 'no temperature has three distinct rates with 0.05 < α < 0.95 at once';
    reports.push(report('ozawa', false, reason, rows));
    flags.push(
      flag(
        'method-not-applicable',
        `Ozawa’s exponent was not computed: ${reason}.`,
        'Add cooling rates between those there.',
        where,
      ),
    );
  }
  return { parameters: list.rows, reports, flags };
}

/** Draws of T(α): a line of T against ln|β| at each conversion, whole residual curves of scans, shared calibration errors. */
function drawTemperatures(data: EventData, lnRate: Float64Array, random: Random, draws: number): EventColumns[] {
  const { n } = data;
  const fitted = new Float64Array(n * CONVERSION_COUNT);
  const residual = new Float64Array(n * CONVERSION_COUNT);
  const middle = lnRate.reduce((s, v) => s + v, 0) / n;
  const xx = lnRate.reduce((s, v) => s + (v - middle) ** 2, 0);
  const lift = lnRate.map((v) => 1 / Math.sqrt(Math.max(0.01, 1 - 1 / n - (v - middle) ** 2 / xx)));
  for (let k = 0; k < CONVERSION_COUNT; k++) {
    const T = Float64Array.from({ length: n }, (_, i) => data.temperatureK[i * CONVERSION_COUNT + k]);
    const { residuals } = fitLine(lnRate, T);
    for (let i = 0; i < n; i++) {
      residual[i * CONVERSION_COUNT + k] = residuals[i];
      fitted[i * CONVERSION_COUNT + k] = T[i] - residuals[i];
    }
  }
  return Array.from({ length: draws }, () => {
    const calibration = data.instruments.map((c) => drawCalibration(c, random));
    const temperatureK = new Float64Array(n * CONVERSION_COUNT);
    for (let i = 0; i < n; i++) {
      const from = random.integer(n);
      const { offset, lag } = calibration[data.instrument[i]];
      for (let k = 0; k < CONVERSION_COUNT; k++) {
        const own = i * CONVERSION_COUNT + k;
        temperatureK[own] =
          fitted[own] + lift[from] * residual[from * CONVERSION_COUNT + k] - offset - lag * data.rate[i];
      }
    }
    return { ...data, temperatureK };
  });
}
