/** From the parameters of a fit to times and temperatures. Every output carries FORECAST_CAUTION of schema/wire/forecasts.ts. */
export { answerQuestion, createForecaster, type Limit } from './answer.ts';
export { type CriticalRates, criticalRateRows, findCriticalRates } from './critical-rates.ts';
export type { DiagramLine } from './diagram-line.ts';
export { drawTransformation } from './diagrams.ts';
export { forecastTable, standardTemperatures } from './forecast-table.ts';
export { drawHeating } from './heating.ts';
export { TEMPERATURE_RANGE } from './kinetics.ts';
export { drawnParameters, lnTimeGradient, sharedRateCurve } from './rate-curve.ts';
export { type ForecastRequest, MOST_PROGRAM_ROWS, questionOf } from './request.ts';
export { makeForecastSource, type SourceParts } from './source.ts';
export { timeText } from './wording.ts';
