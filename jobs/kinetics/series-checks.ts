import { type Flag, flag } from '../../schema/wire/flags.ts';
import type { ParameterRow } from '../../schema/wire/parameters.ts';
import { fitLine } from '../numeric/line.ts';
import type { EventData } from './event-data.ts';

/** A slope below this many of its standard errors is no dependence on rate. */
const SLOPE_ERRORS = 2;
/** Neighbouring rates at least this factor apart must raise the temperature. */
const APART = 1.4;
/** A fall must exceed this many standard errors of the two temperatures. */
const FALL_ERRORS = 2;

interface Where {
  sample: string;
  event: number;
}

/**
 * An event whose temperature does not rise with heating rate is not a crystallisation on heating (melting, a eutectoid, another transition):
 * then no energy is computed. The slope dT/d ln β must be above twice its standard error.
 */
export function findRateIndependence(data: EventData, where: Where): Flag | undefined {
  const { slope, slopeError } = fitLine(data.rate.map(Math.log), data.peakK);
  if (slope > SLOPE_ERRORS * slopeError) return undefined;
  return flag(
    'rate-independent',
    `The temperature of event ${where.event} does not rise with heating rate: ${slope.toFixed(2)} ± ${slopeError.toFixed(2)} K for each factor e in rate, where a crystallisation shifts by 5 to 50 K. No activation energy was computed.`,
    'Check that this is the exotherm meant: melting and other equilibrium transitions do not move with rate. Measure over a wider span of rates if it is.',
    where,
  );
}

/** A Kissinger energy whose interval by Student's t holds zero: a number is given, but the data do not determine it. */
export function findUndeterminedEnergy(rows: readonly ParameterRow[], where: Where): Flag | undefined {
  const row = rows.find(
    (r) => r.quantity === 'activation_energy' && r.method === 'kissinger' && r.interval === 'student_t',
  );
  if (!row || row.lower95 === null || row.lower95 > 0) return undefined;
  return flag(
    'energy-undetermined',
    `Kissinger’s E of event ${where.event}, ${row.value.toFixed(0)} kJ/mol, has a 95 % interval by Student’s t of ± ${(row.value - row.lower95).toFixed(0)} kJ/mol on ${row.scan_count} scans: it holds zero.`,
    'Measure more rates over a wider span, or repeat these; do not quote this E.',
    where,
  );
}

/** Scans whose onset lies above their peak: a slip in the table or in the limits. */
export function findOnsetsAbovePeak(data: EventData, where: Where): Flag[] {
  return data.scans
    .filter(({ event }) => event.onsetK > event.peakK)
    .map(({ event, file, instrument }) =>
      flag(
        'onset-above-peak',
        `The onset at ${event.onsetK.toFixed(1)} K lies above the peak at ${event.peakK.toFixed(1)} K.`,
        'Correct the table or look at the thermogram; methods that use the peak alone still use this scan.',
        { ...where, file, instrument },
      ),
    );
}

/** A temperature that falls from one rate to the next higher one by more than its error, for the peak and the onset. */
export function findNonMonotonicSeries(data: EventData, where: Where): Flag[] {
  const out: Flag[] = [];
  for (const [name, of] of [
    ['peak', (i: number) => data.scans[i].event.peakK],
    ['onset', (i: number) => data.scans[i].event.onsetK],
  ] as const) {
    const levels = meanByRate(data, of);
    for (let k = 1; k < levels.length; k++) {
      const [a, b] = [levels[k - 1], levels[k]];
      const error = Math.hypot(a.errorK, b.errorK);
      if (!(b.rate > APART * a.rate) || !(a.temperatureK - b.temperatureK > FALL_ERRORS * error)) continue;
      out.push(
        flag(
          'series-not-monotonic',
          `The ${name} falls from ${a.temperatureK.toFixed(1)} K at ${(a.rate * 60).toPrecision(3)} K/min to ${b.temperatureK.toFixed(1)} K at ${(b.rate * 60).toPrecision(3)} K/min, by more than ${FALL_ERRORS} × its error of ${error.toFixed(1)} K; it should rise.`,
          'Look at both scans for a mix-up of rates, another state of the sample or a slip in the table.',
          where,
        ),
      );
    }
  }
  return out;
}

interface Level {
  rate: number;
  temperatureK: number;
  errorK: number;
}

/** Means of scans whose rates lie within 2 % of each other; scans come sorted by rate. Calibration errors of the instrument count once. */
function meanByRate(data: EventData, of: (i: number) => number): Level[] {
  const groups: number[][] = [];
  for (let i = 0; i < data.n; i++) {
    if (!Number.isFinite(of(i))) continue;
    const last = groups[groups.length - 1];
    if (last && data.rate[i] <= data.rate[last[0]] * 1.02) last.push(i);
    else groups.push([i]);
  }
  return groups.map((g) => {
    const part = 1 / g.length;
    const sum = (f: (i: number) => number) => g.reduce((s, i) => s + f(i), 0);
    const c = data.instruments[data.instrument[g[0]]];
    const shared = data.instruments.length > 1 ? c.offsetSeK ** 2 + (c.lagSeS * data.rate[g[0]]) ** 2 : 0;
    const own = sum((i) => data.scans[i].event.peakErrorK ** 2) * part * part;
    return { rate: sum((i) => data.rate[i]) * part, temperatureK: sum(of) * part, errorK: Math.sqrt(own + shared) };
  });
}
