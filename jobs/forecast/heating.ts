import type { ForecastSource } from '../../schema/wire/forecasts.ts';
import { beyondMeasured, DIAGRAM_CONVERSIONS, type DiagramLine, type Heating } from './diagram-line.ts';
import { createModelFreeHeating } from './model-free-heating.ts';
import { createSharedHeating } from './shared-heating.ts';

/** Decades of rate that a diagram without asked rates shows below and above the measured ones, and its points a decade. */
const MARGIN_DECADES = 2;
const POINTS_A_DECADE = 3;
/** The line of the critical conversion ends just below its critical rate. */
const JUST_BELOW = 1e-9;

/**
 * Constant heating: temperature in K (y) at which each conversion is reached on heating from the cold at a constant rate in K/s (x, ascending),
 * by every method of the source. Lines of the shared law end where a rate no longer reaches the conversion before melting.
 *
 * The even scale is ln β: at one temperature a draw reaches the conversion at another rate than the estimate. The spread of that gives the
 * half width, and the ends of the band are where the estimate's line has the rates that much away.
 */
export function drawHeating(
  source: ForecastSource,
  ratesKPerS?: readonly number[],
  conversions: readonly number[] = DIAGRAM_CONVERSIONS,
): DiagramLine[] {
  const methods = [createSharedHeating(source), createModelFreeHeating(source)].filter((m) => m !== undefined);
  if (methods.length === 0) return [];
  const lnRates = (ratesKPerS?.map(Math.log) ?? standardRates(source, methods[0])).sort((a, b) => a - b);
  return methods.flatMap((m) => {
    const asked = conversions.flatMap((conversion) => lnRates.map((lnRate) => ({ conversion, lnRate })));
    const answers = m.answer(asked);
    return conversions.map((conversion): DiagramLine => {
      const own = asked.flatMap((ask, i) => (ask.conversion === conversion && answers[i].K > 0 ? [i] : []));
      const column = (of: (i: number) => number) => Float64Array.from(own, of);
      return {
        method: m.method,
        conversion,
        x: column((i) => Math.exp(asked[i].lnRate)),
        y: column((i) => answers[i].K),
        lower: column((i) => answers[i].lower),
        upper: column((i) => answers[i].upper),
        beyondMeasuredK: column((i) => beyondMeasured(source, answers[i].K)),
      };
    });
  });
}

/** ln of rates over whole decades: those that were measured, by the peaks at both ends, a margin, and on to the critical rate where there is one. */
function standardRates({ lowestMeasuredK, highestMeasuredK }: ForecastSource, heating: Heating): number[] {
  const { lnCriticalRate } = heating;
  const decade = (temperatureK: number) => heating.lnRateOf(0.5, temperatureK) / Math.LN10;
  const from = Math.floor(decade(lowestMeasuredK)) - MARGIN_DECADES;
  const measured = Math.ceil(decade(highestMeasuredK)) + MARGIN_DECADES;
  const to = Math.max(measured, Math.ceil((lnCriticalRate ?? Number.NEGATIVE_INFINITY) / Math.LN10));
  if (!(to > from)) return [];
  const count = (to - from) * POINTS_A_DECADE + 1;
  const rates = Array.from({ length: count }, (_, i) => (from + i / POINTS_A_DECADE) * Math.LN10);
  if (lnCriticalRate !== undefined) rates.push(lnCriticalRate - JUST_BELOW);
  return rates;
}
