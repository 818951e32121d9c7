import { flag } from '../../schema/wire/flags.ts';
import type { Segment } from '../../schema/wire/reduced.ts';
import { lowerBound } from '../numeric/local-polynomial.ts';
import type { ScanContext } from './scan-context.ts';
import { slopeOf } from './segments.ts';

const OFF_NOMINAL = 0.02;
const UNSTEADY = 0.05;
/** Fewer rows than this over the event cannot tell a drift of its rate. */
const ROWS_FOR_DRIFT = 40;

/** Measured rate over an event, K/s, signed; flags when it is unsteady or off the nominal one. */
export function eventRate(
  c: ScanContext,
  m: { peakS: number; widthS: number },
  segment: Segment,
  where: object,
): number {
  const { timeS, temperatureK } = c.scan;
  const a = Math.min(segment.to - 3, Math.max(segment.from, lowerBound(timeS, m.peakS - 1.5 * m.widthS)));
  const b = Math.min(segment.to, Math.max(a + 3, lowerBound(timeS, m.peakS + 1.5 * m.widthS)));
  const rate = slopeOf(timeS, temperatureK, a, b);
  if (segment.kind === 'hold') return rate;
  const middle = (a + b) >> 1;
  const drift = slopeOf(timeS, temperatureK, middle, b) / slopeOf(timeS, temperatureK, a, middle) - 1;
  if (b - a >= ROWS_FOR_DRIFT && Math.abs(drift) > UNSTEADY) {
    c.flags.push(
      flag(
        'rate-unsteady',
        `The heating rate changes by ${(100 * drift).toFixed(1)} % within the event (limit 5 %).`,
        'Check the instrument’s control at this rate; the measured programme is used, peak methods are less certain.',
        where,
      ),
    );
  }
  const nominal = c.input.rateNominalKPerS;
  if (nominal !== undefined && Math.abs(Math.abs(rate) / nominal - 1) > OFF_NOMINAL) {
    c.flags.push(
      flag(
        'rate-off-nominal',
        `The measured rate ${rate.toPrecision(4)} K/s is ${(100 * (Math.abs(rate) / nominal - 1)).toFixed(1)} % off the nominal ${nominal.toPrecision(4)} K/s (limit 2 %).`,
        'The measured rate is used; correct the rate column of scans.csv if it is a slip.',
        where,
      ),
    );
  }
  return rate;
}
