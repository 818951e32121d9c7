import { type Flag, flag } from '../../schema/wire/flags.ts';
import type { FitReport, FitScan } from '../../schema/wire/parameters.ts';
import { CONVERSION_GRID } from '../../schema/wire/reduced.ts';
import type { InstrumentCalibration } from '../../schema/wire/scan.ts';
import { studentQuantile } from '../numeric/distributions.ts';
import { autocorrelationInflation } from '../numeric/linear-model.ts';
import type { Random } from '../numeric/random.ts';
import { mean, standardDeviation } from '../numeric/statistics.ts';
import { fitArrhenius, type Hold, holdDraws } from './avrami/hold-series.ts';
import { fitHold, localExponent } from './avrami/isothermal.ts';
import { APART_K, collectEvent, distinctTemperatures } from './event-data.ts';
import type { EventFit } from './fit-event.ts';
import { noteExponent } from './judge-model.ts';
import { RowList } from './row-list.ts';

/** A hold reached after this conversion is no isothermal scan. */
const LATEST_REACHED = 0.05;
const LEAST_TEMPERATURES = 3;

/** Holds of one event: isothermal JMAK of each, the mean exponent, and E and ln A from ln K against 1/T. */
export function fitHolds(
  sample: string,
  event: number,
  scans: FitScan[],
  calibrations: InstrumentCalibration[],
  random: Random,
  draws: number,
): EventFit {
  const where = { sample, event };
  const flags: Flag[] = [];
  const reports: FitReport[] = [];
  const data = collectEvent(event, scans, calibrations);
  const list = new RowList(sample, event, data);
  const holds: Hold[] = [];
  for (const scan of data.scans) {
    const { curve, holdK, holdReachedS } = scan.event;
    const at = { ...where, file: scan.file, instrument: scan.instrument };
    if (!curve || holdK === undefined || holdReachedS === undefined) {
      const message = 'the hold has no usable conversion curve';
      reports.push(report(event, message, false, 0, null));
      flags.push(
        flag('method-not-applicable', `JMAK was not fitted: ${message}.`, 'Sample faster or use more mass.', at),
      );
      continue;
    }
    const late = CONVERSION_GRID.filter((_, k) => curve.timeS[k] < holdReachedS).pop() ?? 0;
    if (late > LATEST_REACHED) {
      flags.push(
        flag(
          'hold-late',
          `α was ${late.toFixed(2)} when the hold at ${holdK.toFixed(1)} K was reached (limit ${LATEST_REACHED}); it was left out of the isothermal fit.`,
          'Ramp faster or hold lower; the isoconversional methods on the measured programme still use the scan.',
          at,
        ),
      );
      reports.push(report(event, `α = ${late.toFixed(2)} when ${holdK.toFixed(1)} K was reached`, false, 0, null));
      continue;
    }
    const fit = fitHold(curve.timeS, CONVERSION_GRID, holdReachedS);
    const { covariance, parameters, converged, message, evaluations } = fit.fit;
    const local = localExponent(curve.timeS, CONVERSION_GRID, fit.startS).slice(9, 90).filter(Number.isFinite);
    const induction = fit.bounded
      ? 'no induction time (at its bound: the hold’s beginning)'
      : `induction time ${(fit.startS - holdReachedS).toPrecision(3)} s`;
    const correlation =
      covariance && !fit.bounded
        ? `, correlation of n and t0 ${(covariance[5] / Math.sqrt(covariance[4] * covariance[8])).toFixed(2)}`
        : '';
    reports.push(
      report(
        event,
        `${holdK.toFixed(1)} K: ${message}; ${induction}${correlation}; local exponent ${Math.min(...local).toFixed(2)} to ${Math.max(...local).toFixed(2)} over α = 0.1 to 0.9`,
        converged,
        evaluations,
        fit.residualRms,
      ),
    );
    if (!converged) {
      flags.push(
        flag(
          'fit-not-converged',
          `The isothermal JMAK fit at ${holdK.toFixed(1)} K stopped: ${message}.`,
          'Look at the curve for damage.',
          at,
        ),
      );
      continue;
    }
    const p = parameters.length;
    const error = covariance
      ? Math.sqrt(covariance[p + 1] * autocorrelationInflation(fit.residuals))
      : Number.POSITIVE_INFINITY;
    holds.push({ scan, temperatureK: holdK, fit, exponentError: error });
  }
  rowsOfHolds(list, holds, data.instruments, where, flags, reports, random, draws);
  return { parameters: list.rows, reports, flags };
}

function rowsOfHolds(
  list: RowList,
  holds: Hold[],
  calibrations: readonly InstrumentCalibration[],
  where: { sample: string; event: number },
  flags: Flag[],
  reports: FitReport[],
  random: Random,
  draws: number,
): void {
  if (holds.length === 0) return;
  const { event } = where;
  const line = fitArrhenius(holds);
  const temperatures = distinctTemperatures(holds.map((h) => h.temperatureK));
  const many = temperatures.length >= LEAST_TEMPERATURES;
  const determined = many && Math.abs(line.energy) > studentQuantile(0.975, holds.length - 2) * line.energyError;
  const drawn = many ? holdDraws(holds, line, calibrations, random, draws) : [];
  const degrees = holds.length - 2;
  const exponent = mean(holds.map((h) => h.fit.exponent));
  const row = (quantity: string, unit: string) => [quantity, 'jmak_isothermal', unit] as const;
  const n = row('avrami_exponent', '1');
  holds.forEach(({ temperatureK, fit, exponentError }, i) => {
    const half = studentQuantile(0.975, fit.residuals.length - fit.fit.parameters.length) * exponentError;
    const limits = [fit.exponent - half, fit.exponent + half] as const;
    if (many)
      list.drawn(
        ...n,
        fit.exponent,
        drawn.map((d) => d.exponents[i]),
        degrees,
        { temperatureK },
      );
    list.push(...n, fit.exponent, limits, { temperatureK, interval: 'student_t' });
  });
  const values = holds.map((h) => h.fit.exponent);
  if (many)
    list.drawn(
      ...n,
      exponent,
      drawn.map((d) => mean(d.exponents)),
      degrees,
    );
  if (holds.length > 1) {
    const half = (studentQuantile(0.975, holds.length - 1) * standardDeviation(values)) / Math.sqrt(holds.length);
    list.push(...n, exponent, [exponent - half, exponent + half], { interval: 'student_t' });
  }
  flags.push(...checkRateConstants(holds, where));
  if (!many) {
    const message = `E needs holds at three temperatures; there ${temperatures.length === 1 ? 'is' : 'are'} ${temperatures.length}`;
    reports.push(report(event, message, false, 0, null));
    flags.push(
      flag('few-rates', `${message}.`, 'Add holds at other temperatures, 5 to 10 K apart.', {
        ...where,
        severity: 'stop',
      }),
    );
  } else if (!determined) {
    const message = `ln K against 1/T gives ${(line.energy / 1e3).toFixed(0)} ± ${(line.energyError / 1e3).toFixed(0)} kJ/mol (standard error): its 95 % interval holds zero`;
    reports.push(report(event, message, false, 0, line.scatter));
    flags.push(
      flag(
        'energy-undetermined',
        `No activation energy from the holds: ${message}.`,
        'Add holds, wider apart; look at those that break the order.',
        where,
      ),
    );
  } else {
    const half = (studentQuantile(0.975, degrees) * line.energyError) / 1e3;
    const E = line.energy / 1e3;
    const energy = row('activation_energy', 'kJ/mol');
    list.drawn(
      ...energy,
      E,
      drawn.map((d) => d.energy / 1e3),
      degrees,
    );
    list.push(...energy, E, [E - half, E + half], { interval: 'student_t' });
    list.drawn(
      ...row('ln_prefactor', 'ln(1/s)'),
      line.lnPrefactor,
      drawn.map((d) => d.lnPrefactor),
      degrees,
    );
    if (E < 0) {
      flags.push(
        flag(
          'negative-energy',
          `The rate constant falls with temperature (E = ${E.toFixed(0)} kJ/mol): crystallisation below melting, where the driving force rules.`,
          'Read E as an effective energy of this range; do not extrapolate by Arrhenius’ law.',
          where,
        ),
      );
    }
  }
  const pooled = list.rows.find((r) => r.quantity === 'avrami_exponent' && r.temperature_K === null);
  flags.push(...noteExponent(pooled ?? list.rows.find((r) => r.quantity === 'avrami_exponent'), where));
}

/** Rate constants that neither rise nor fall all along with temperature. */
function checkRateConstants(holds: Hold[], where: { sample: string; event: number }): Flag[] {
  const sorted = [...holds].sort((a, b) => a.temperatureK - b.temperatureK);
  const steps = sorted.slice(1).flatMap((h, i) => {
    if (h.temperatureK - sorted[i].temperatureK <= APART_K) return [];
    return [{ low: sorted[i], high: h, change: h.fit.lnRate - sorted[i].fit.lnRate }];
  });
  const up = steps.filter((s) => s.change > 0);
  const down = steps.filter((s) => s.change < 0);
  if (up.length === 0 || down.length === 0) return [];
  const odd = (up.length >= down.length ? down : up)[0];
  return [
    flag(
      'series-not-monotonic',
      `ln K goes from ${odd.low.fit.lnRate.toFixed(2)} at ${odd.low.temperatureK.toFixed(1)} K to ${odd.high.fit.lnRate.toFixed(2)} at ${odd.high.temperatureK.toFixed(1)} K, against the other holds.`,
      'Look at these holds for a mix-up, another state of the sample, or a range around the maximum of the rate.',
      where,
    ),
  ];
}

const report = (
  event: number,
  message: string,
  converged: boolean,
  evaluations: number,
  residualRms: number | null,
): FitReport => ({
  event,
  method: 'jmak_isothermal',
  converged,
  message,
  evaluations,
  residualRms,
  rows: evaluations > 0 ? CONVERSION_GRID.length : 0,
});
