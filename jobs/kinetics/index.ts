import { type Flag, flag } from '../../schema/wire/flags.ts';
import type { FitInput, FitResult, FitScan, ParameterRow } from '../../schema/wire/parameters.ts';
import { createRandom } from '../numeric/random.ts';
import { distinctRates, LEAST_RATES } from './event-data.ts';
import { fitCooling } from './fit-cooling.ts';
import { type EventFit, fitEvent } from './fit-event.ts';
import { fitHolds } from './fit-holds.ts';
import { fitMixed } from './fit-mixed.ts';

/**
 * All kinetics of one sample: peak, isoconversional and JMAK estimates of each event with 95 % intervals from the seeded Monte Carlo. Heating, cooling and hold scans are fitted apart; holds and ramps meet in the isoconversional methods alone.
 * Pure: the same input gives the same numbers, whatever order the scans came in.
 */
export function fitSample(input: FitInput): FitResult {
  const flags: Flag[] = [];
  const fits: EventFit[] = [];
  const events = [...new Set(input.scans.map((s) => s.event.event))].sort((a, b) => a - b);
  const refused: string[] = [];
  let lastEvent = events[events.length - 1] ?? 0;
  for (const event of events) {
    const of = (kind: FitScan['event']['kind']) =>
      input.scans.filter((s) => s.event.event === event && s.event.kind === kind);
    const [ramps, holds, coolings] = [of('heating'), of('hold'), of('cooling')];
    const random = (kind: string) => () => createRandom(`${input.seed}:${event}${kind}`);
    const { sample, instruments, draws } = input;
    const rates = distinctRates(ramps.map((s) => s.event.rateKPerS));
    const mixed = holds.length > 0 && fitMixed(sample, event, ramps, holds, instruments, random(':mixed')(), draws);
    if (ramps.length > 0 && rates.length < LEAST_RATES) {
      const detail = `Event ${event} was measured at ${rates.length} distinct heating rate${rates.length === 1 ? '' : 's'}; at least 3 are needed, 5 recommended.`;
      refused.push(detail);
      flags.push(
        flag('few-rates', detail, 'Run the missing rates; the coverage table shows which are there.', {
          sample,
          event,
        }),
      );
    } else if (ramps.length > 0) {
      const fit = fitEvent(sample, event, ramps, instruments, random(''), draws);
      fits.push(mixed ? { ...fit, parameters: fit.parameters.filter((r) => !sharedWithHolds(r)) } : fit);
    }
    if (mixed) fits.push(mixed);
    if (holds.length > 0) fits.push(fitHolds(sample, event, holds, instruments, random(':hold')(), draws));
    if (coolings.length > 0) {
      // One number a row: an event seen on heating too keeps its number there, and its cooling scans are numbered behind.
      const number = ramps.length + holds.length > 0 ? ++lastEvent : event;
      fits.push(fitCooling(sample, number, event, coolings, instruments, random(':cooling')(), draws));
    }
  }
  for (const c of input.instruments) {
    if (c.source !== 'prior' || !input.scans.some((s) => s.instrument === c.instrument)) continue;
    flags.push(
      flag(
        'lag-unknown',
        `Nothing is known of the lag and offset of ${c.instrument}; the intervals allow ${c.offsetSeK} K of offset and ${c.lagSeS} s of lag.`,
        'Run a standard at several rates, or give lag and offset in instruments.csv.',
        { sample: input.sample, instrument: c.instrument },
      ),
    );
  }
  const parameters = fits.flatMap((f) => f.parameters);
  const all = [...flags, ...fits.flatMap((f) => f.flags)];
  const reports = fits.flatMap((f) => f.reports);
  const modelFree = fits.flatMap((f) => f.modelFree ?? []);
  if (parameters.length > 0) {
    return { state: 'fitted', parameters, reports, flags: all, ...(modelFree.length > 0 && { modelFree }) };
  }
  for (const f of all) if (f.severity === 'stop' && !refused.includes(f.detail)) refused.push(f.detail);
  const reason = events.length === 0 ? 'no scan of this sample shows an event' : refused.join(' ');
  return { state: 'insufficient', reason, parameters: [], reports, flags: all };
}

/** Rows that the fit of ramps and holds together gives. */
const sharedWithHolds = ({ quantity, method, variant }: ParameterRow): boolean =>
  quantity === 'activation_energy' && variant === '' && (method === 'friedman' || method === 'vyazovkin');
