import type { Context } from 'hono';
import type { ApiEnv } from './access.ts';
import { answerCsv, formatQuery } from './csv-lists.ts';
import { type CurveSeries, type Curves, seriesShape } from './shapes/curves.ts';

/** Query of a route that gives curves. */
export const CURVES_CSV = formatQuery('one row a point: the fields of its series, and quantity and unit of both axes');

const FIELDS = Object.keys(seriesShape.shape) as (keyof CurveSeries)[];
const AXES = ['x_quantity', 'x_unit', 'y_quantity', 'y_unit'];

function* pointsOf({ x, y, series }: Pick<Curves, 'x' | 'y' | 'series'>): Generator<Record<string, unknown>> {
  const axes = { x_quantity: x.quantity, x_unit: x.unit, y_quantity: y.quantity, y_unit: y.unit };
  for (const one of series)
    for (let i = 0; i < one.x.length; i++) {
      const point: Record<string, unknown> = { ...axes };
      for (const field of FIELDS) {
        const value = one[field];
        point[field] = Array.isArray(value) ? value[i] : value;
      }
      yield point;
    }
}

export const answerCurvesCsv = (
  c: Context<ApiEnv>,
  curves: { kind: string } & Pick<Curves, 'x' | 'y' | 'series'>,
): never => answerCsv(c, curves.kind, [...FIELDS, ...AXES], pointsOf(curves));
