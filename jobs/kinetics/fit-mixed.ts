import { flag } from '../../schema/wire/flags.ts';
import type { FitScan } from '../../schema/wire/parameters.ts';
import type { InstrumentCalibration } from '../../schema/wire/scan.ts';
import type { Random } from '../numeric/random.ts';
import {
  CONVERSION_COUNT,
  CONVERSIONS,
  collectEvent,
  distinctProgrammes,
  isUsable,
  LEAST_RATES,
} from './event-data.ts';
import type { EventFit } from './fit-event.ts';
import { fitProgrammes } from './isoconversional/programmes.ts';
import { COOLING_BRACKET } from './isoconversional/vyazovkin.ts';
import { RowList } from './row-list.ts';

/**
 * Friedman and incremental Vyazovkin over the holds of an event, together with its heating ramps where there are some (any
 * programme, holds included). Nothing when fewer than three distinct programmes have a curve, or at no conversion three that are usable.
 */
export function fitMixed(
  sample: string,
  event: number,
  ramps: FitScan[],
  holds: FitScan[],
  calibrations: InstrumentCalibration[],
  random: Random,
  draws: number,
): EventFit | undefined {
  const scans = [...ramps, ...holds].filter(({ event: e }) => e.curve && CONVERSIONS.some((a) => isUsable(e, a)));
  const { rates, temperatures } = distinctProgrammes(scans);
  if (temperatures.length === 0 || rates.length + temperatures.length < LEAST_RATES) return undefined;
  const data = collectEvent(event, scans, calibrations);
  // A hold's own slope is noise; its offset is what moves it.
  data.scans.forEach((s, i) => {
    if (s.event.kind === 'hold') data.rate[i] = 0;
  });
  const fit = fitProgrammes(data, rates.length > 0 ? undefined : COOLING_BRACKET, random, draws);
  if (!fit.counts.friedman.determined.some(Boolean)) return undefined;
  const list = new RowList(sample, event, data);
  list.programmes(fit, rates.length > 0 ? ['mixed-programmes'] : []);
  const pooled = list.rows.find((r) => r.method === 'friedman' && r.conversion === null);
  const rows = data.n * CONVERSION_COUNT;
  if (pooled && (pooled.lower95 ?? 0) < 0 && (pooled.upper95 ?? 0) > 0) {
    const message = `the 95 % interval of Friedman’s E, ${pooled.value.toFixed(0)} kJ/mol (${pooled.lower95?.toFixed(0)} to ${pooled.upper95?.toFixed(0)}), holds zero`;
    const failed = { converged: false, message, evaluations: 0, residualRms: null, rows };
    return {
      parameters: [],
      reports: [
        { event, method: 'friedman', ...failed },
        { event, method: 'vyazovkin', ...failed },
      ],
      flags: [
        flag('energy-undetermined', `No isoconversional energy: ${message}.`, 'Add holds, wider apart.', {
          sample,
          event,
        }),
      ],
    };
  }
  const kinds = `${rates.length > 0 ? `${scans.length - holds.length} ramps and ` : ''}${temperatures.length} hold temperatures`;
  return {
    parameters: list.rows,
    reports: [
      {
        event,
        method: 'vyazovkin',
        converged: fit.estimate.converged,
        message: fit.estimate.converged ? `${kinds} in one fit` : `no minimum at some conversion (${kinds})`,
        evaluations: 0,
        residualRms: null,
        rows,
      },
    ],
    flags:
      rates.length > 0
        ? [
            flag(
              'mixed-programmes',
              `Friedman and incremental Vyazovkin take ${kinds} of event ${event} in one fit; every other method takes ramps or holds alone.`,
              'Nothing to do; exclude the holds to see the ramps alone.',
              { sample, event },
            ),
          ]
        : [],
  };
}
