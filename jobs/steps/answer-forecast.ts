import type { ForecastQuestion, ForecastRow, ForecastSource } from '../../schema/wire/forecasts.ts';
import { answerQuestion, type DiagramLine, drawHeating, drawTransformation } from '../forecast/index.ts';
import type { Ports } from '../ports/index.ts';
import { readForecastSources } from '../store/forecast-sources.ts';

/**
 * Answers one question for every event of a sample from the draws that its forecasts left: no fit, well under 100 ms an event.
 * @returns no row where the sample has no forecast (yet)   @throws RangeError for a question outside its range, quoting the value
 */
export async function answerForecast(
  ports: Ports,
  sampleId: string,
  question: ForecastQuestion,
): Promise<ForecastRow[]> {
  const sources = await readForecastSources(ports, sampleId);
  return sources.flatMap((source) => answerQuestion(source, question));
}

const DIAGRAMS = {
  ttt: (source: ForecastSource) => drawTransformation(source),
  constant_heating: (source: ForecastSource) => drawHeating(source),
};

/** A diagram of one event. */
export interface EventDiagram {
  event: number;
  meltingK?: number;
  lines: DiagramLine[];
}

/** Diagrams of every event of a sample, drawn when asked for, from one look at what its forecasts left. */
export async function readDiagrams(
  ports: Ports,
  sampleId: string,
): Promise<(kind: keyof typeof DIAGRAMS) => EventDiagram[]> {
  const sources = await readForecastSources(ports, sampleId);
  return (kind) =>
    sources.map((source) => ({
      event: source.event,
      lines: DIAGRAMS[kind](source),
      ...(source.melting && { meltingK: source.melting.meltingK }),
    }));
}
