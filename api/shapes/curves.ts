import { z } from '@hono/zod-openapi';
import { CURVE_KINDS } from '../../schema/wire/curve-kinds.ts';

export const CURVE_NOTES =
  'The diagrams `ttt` (time at constant temperature) and `constant_heating` (temperature at constant heating rate) have one series an event, method and conversion, with the 95 % band and with the distance of each point from the measured temperatures. Where a critical heating rate is known a series of that name stands upright at it up to the melting temperature, and there goes to the lower and to the upper end of its interval.';

/** Points of one curve at most. */
export const CURVE_POINTS = 2000;

export const axisShape = z.object({ quantity: z.string(), unit: z.string() });
const points = z.array(z.number()).max(CURVE_POINTS);

export const seriesShape = z.object({
  name: z.string(),
  instrument: z.string().optional(),
  scan_id: z.string().optional(),
  x: points,
  y: points,
  lower: points.optional(),
  upper: points.optional(),
  /** Of y, where it may differ between series */
  unit: z.string().optional(),
  /** s from the start of a hold, whose temperature hardly changes */
  time_s: points.optional(),
  /** How far the temperature of each point of a forecast lies outside the measured ones, K */
  beyond_measured_K: points.optional(),
});

export const CurvesShape = z
  .object({
    kind: z.enum(CURVE_KINDS),
    x: axisShape,
    y: axisShape,
    series: z.array(seriesShape),
    /** What stands on every forecast */
    caution: z.string().optional(),
  })
  .openapi('Curves');
export type Curves = z.infer<typeof CurvesShape>;
export type CurveSeries = Curves['series'][number];
