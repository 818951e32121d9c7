import { type Flag, flag } from '../../schema/wire/flags.ts';
import type { FitInput, FitResult } from '../../schema/wire/parameters.ts';
import { createRandom } from '../numeric/random.ts';
import { distinctRates } from './event-data.ts';
import { type EventFit, fitEvent, LEAST_RATES } from './fit-event.ts';

/**
 * All kinetics of one sample: peak, isoconversional and JMAK estimates of each event with 95 % intervals from the seeded Monte Carlo
 * (METHODS 5–7, 11). Pure: the same input gives the same numbers, whatever order the scans came in.
 */
export function fitSample(input: FitInput): FitResult {
  const flags: Flag[] = [];
  const fits: EventFit[] = [];
  const events = [...new Set(input.scans.map((s) => s.event.event))].sort((a, b) => a - b);
  const refused: string[] = [];
  for (const event of events) {
    const scans = input.scans.filter((s) => s.event.event === event);
    const rates = distinctRates(scans.map((s) => s.event.rateKPerS));
    if (rates.length < LEAST_RATES) {
      const detail = `Event ${event} was measured at ${rates.length} distinct heating rate${rates.length === 1 ? '' : 's'}; at least 3 are needed, 5 recommended.`;
      refused.push(detail);
      flags.push(
        flag('few-rates', detail, 'Run the missing rates; the coverage table shows which are there.', {
          sample: input.sample,
          event,
        }),
      );
      continue;
    }
    fits.push(
      fitEvent(
        input.sample,
        event,
        scans,
        input.instruments,
        () => createRandom(`${input.seed}:${event}`),
        input.draws,
      ),
    );
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
  if (fits.length > 0) return { state: 'fitted', parameters, reports, flags: all };
  const reason = events.length === 0 ? 'no scan of this sample shows an event' : refused.join(' ');
  return { state: 'insufficient', reason, parameters: [], reports, flags: all };
}
