import { z } from '@hono/zod-openapi';

/** Kinds of curves that a sample has. */
export const CURVE_KINDS = [
  'thermogram',
  'baseline',
  'conversion',
  'kissinger',
  'energy',
  'local_energy',
  'growth',
  'viscosity',
  'ttt',
] as const;
export type CurveKind = (typeof CURVE_KINDS)[number];

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
});

export const CurvesShape = z
  .object({
    kind: z.enum(CURVE_KINDS),
    x: axisShape,
    y: axisShape,
    series: z.array(seriesShape),
  })
  .openapi('Curves');
export type Curves = z.infer<typeof CurvesShape>;
export type CurveSeries = Curves['series'][number];
