import type { ForecastQuestion, ForecastRow } from '../../schema/wire/forecasts.ts';
import { answerQuestion, type DiagramLine, drawTransformation } from '../forecast/index.ts';
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

/** Lines of the time–temperature–transformation diagram, by event. */
export async function answerTransformation(
  ports: Ports,
  sampleId: string,
): Promise<{ event: number; line: DiagramLine }[]> {
  const sources = await readForecastSources(ports, sampleId);
  return sources.flatMap((source) => drawTransformation(source).map((line) => ({ event: source.event, line })));
}
