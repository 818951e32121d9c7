import type { EventDiagram } from '../jobs/steps/answer-forecast.ts';
import type { ResultRow } from '../jobs/store/index.ts';
import type { CurveSeries } from './shapes/curves.ts';

/** Lines of a forecast's diagrams with their bands, one series an event, method and conversion. */
export const diagramSeries = (diagrams: readonly EventDiagram[]): CurveSeries[] =>
  diagrams.flatMap(({ event, lines }) =>
    lines.map(({ method, conversion, x, y, lower, upper, beyondMeasuredK }) => ({
      name: `event ${event}, ${method}, conversion ${conversion}`,
      x: [...x],
      y: [...y],
      lower: [...lower],
      upper: [...upper],
      beyond_measured_K: [...beyondMeasuredK],
    })),
  );

/**
 * The critical heating rate of each event that has one: upright from the foot of the diagram to melting, then along melting to both ends of its
 * interval. @param parameters rows of the parameters table of the sample
 */
export function criticalRateSeries(diagrams: readonly EventDiagram[], parameters: readonly ResultRow[]): CurveSeries[] {
  return diagrams.flatMap(({ event, meltingK, lines }) => {
    const row = parameters.find(
      (p) => p.quantity === 'critical_heating_rate' && p.event === event && p.variant === '' && p.conversion === null,
    );
    const lowest = lines.flatMap(({ lower }) => lower[0] ?? []);
    if (typeof row?.value !== 'number' || meltingK === undefined || lowest.length === 0) return [];
    const ends = [row.lower95, row.upper95].filter((end) => typeof end === 'number');
    return [
      {
        name: `event ${event}, shared_law, critical heating rate`,
        x: [row.value, row.value, ...ends],
        y: [Math.min(...lowest), meltingK, ...ends.map(() => meltingK)],
      },
    ];
  });
}
