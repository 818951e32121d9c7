import { type Flag, flag } from '../../../schema/wire/flags.ts';
import type { FitScan } from '../../../schema/wire/parameters.ts';
import type { GlassFacts } from '../../../schema/wire/verdicts.ts';

/** Above this self-heating number the event's temperatures are its own. */
const MOST_SELF_HEATING = 1;
/** A scan must show at least this much of its conversion. */
const LEAST_SEEN = 0.5;

/**
 * The scans a verdict may rest on: heating, not cut, not self-heated, above the glass transition at their rate. Heating and cooling scans never
 * share a fit; what stays out for another reason is told by its flag.
 */
export function chooseScans(
  sample: string,
  event: number,
  scans: readonly FitScan[],
  facts: GlassFacts,
): { used: FitScan[]; flags: Flag[] } {
  const flags: Flag[] = [];
  const used = scans.filter((s) => {
    const e = s.event;
    if (e.kind !== 'heating' || !(e.rateKPerS > 0)) return false;
    if (e.usableTo - e.usableFrom < LEAST_SEEN || (e.selfHeating ?? 0) > MOST_SELF_HEATING) return false;
    const Tg = glassTransitionOf(s, facts);
    if (Tg === undefined || e.peakK >= Tg) return true;
    flags.push(
      flag(
        'crystallises-from-glass',
        `The peak at ${e.peakK.toFixed(1)} K lies below the glass transition at ${Tg.toFixed(1)} K; the scan stays out of the verdict, which is about the liquid.`,
        'Run faster rates: the peak then moves above the glass transition.',
        { sample, event, file: s.file, instrument: s.instrument },
      ),
    );
    return false;
  });
  return { used, flags };
}

/** Tg of a scan: its own, else that of the sheet (10 K/min). */
function glassTransitionOf(scan: FitScan, { glassTransitions, glassTransitionK }: GlassFacts): number | undefined {
  return glassTransitions?.find((g) => g.file === scan.file)?.temperatureK ?? glassTransitionK;
}
