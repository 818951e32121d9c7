import type { Flag } from '../../schema/wire/flags.ts';
import type { AdviceRow, ForecastRow, ForecastSource } from '../../schema/wire/forecasts.ts';
import type { ParameterRow } from '../../schema/wire/parameters.ts';
import type { SampleForecastInput, SampleForecastResult } from '../../schema/wire/sample-forecast.ts';
import { criticalRateRows, forecastTable, makeForecastSource } from '../forecast/index.ts';
import { adviseScans } from './advice.ts';
import type { AdviceGoal } from './advice-input.ts';

/** Avrami exponent taken where no fit gives one: between the usual 2 and 4. */
const USUAL_EXPONENT = 3;

/**
 * Forecasts, critical rates and advice of one sample, event by event, from what fit and verdict left. Pure and in a fixed
 * order; an event that gives neither a model-free description nor a shared law has no forecast, and may still have advice.
 */
export function forecastSample(input: SampleForecastInput): SampleForecastResult {
  const out: SampleForecastResult = { sources: [], forecasts: [], advice: [], parameters: [], flags: [] };
  const events = [
    ...new Set([...input.modelFree.map((m) => m.event), ...input.judged.verdicts.map((v) => v.event)]),
  ].sort((a, b) => a - b);
  for (const event of events) {
    const source = sourceOf(input, event);
    const forecasts = source ? forecastTable(source, input.goals, input.programmes) : [];
    if (source) {
      out.sources.push(source);
      out.forecasts.push(...forecasts);
      const critical = criticalRatesOf(input, source);
      out.parameters.push(...critical.parameters);
      out.flags.push(...critical.flags);
    }
    out.advice.push(...adviceOf(input, event, source, forecasts));
  }
  return out;
}

function sourceOf(
  { sample, facts, judged, modelFree }: SampleForecastInput,
  event: number,
): ForecastSource | undefined {
  const shared = judged.sharedLaws.find(({ law }) => law.event === event);
  const verdict = judged.verdicts.find((row) => row.event === event)?.verdict;
  const free = modelFree.find((m) => m.event === event);
  return makeForecastSource({
    sample,
    event,
    facts,
    ...(shared && verdict && { shared: { ...shared, verdict } }),
    ...(free && { modelFree: free }),
  });
}

function criticalRatesOf(
  input: SampleForecastInput,
  source: ForecastSource,
): { parameters: ParameterRow[]; flags: Flag[] } {
  const rates = heatingScans(input, source.event).map((scan) => scan.event.rateKPerS);
  if (rates.length === 0) return { parameters: [], flags: [] };
  const { parameters, flags } = criticalRateRows(source, {
    count: rates.length,
    rateMinKPerS: Math.min(...rates),
    rateMaxKPerS: Math.max(...rates),
  });
  return { parameters: parameters.map((row) => ({ ...row, conversion: null })), flags };
}

const heatingScans = ({ scans }: SampleForecastInput, event: number) =>
  scans.filter((scan) => scan.event.event === event && scan.event.kind === 'heating');

/** Advice for the energy at α = 0.5, for the bend where the verdict is open, and for each goal that names conversion and temperature. */
function adviceOf(
  input: SampleForecastInput,
  event: number,
  source: ForecastSource | undefined,
  forecasts: readonly ForecastRow[],
): AdviceRow[] {
  const scans = heatingScans(input, event);
  const energy = headlineEnergy(input.parameters, event);
  if (scans.length === 0 || !energy) return [];
  const goals: AdviceGoal[] = [{ goal: 'energy', ...(energy.width !== undefined && { now: energy.width }) }];
  const verdict = input.judged.verdicts.find((row) => row.event === event)?.verdict;
  if (verdict === 'undecided') goals.push({ goal: 'bend' });
  for (const { sample, conversion, temperatureK } of input.goals) {
    if (sample !== input.sample || conversion === undefined || temperatureK === undefined) continue;
    goals.push({ goal: 'forecast', conversion, temperatureK, ...decadesNow(forecasts, conversion, temperatureK) });
  }
  return adviseScans({
    sample: input.sample,
    event,
    scans,
    instruments: input.instruments,
    ranges: input.ranges,
    energyJPerMol: energy.valueJPerMol,
    avramiExponent: source?.law?.avramiExponent ?? fittedExponent(input.parameters, event) ?? USUAL_EXPONENT,
    ...(verdict && { verdict }),
    ...(input.facts.meltingK !== undefined && { meltingK: input.facts.meltingK }),
    ...(source?.law && { law: source.law }),
    ...(source?.lawDraws && { lawDraws: source.lawDraws }),
    goals,
  });
}

const isHeadline = (row: ParameterRow, event: number) =>
  row.event === event && row.variant === '' && row.interval === 'monte_carlo';

/** E at α = 0.5, where there are no curves Kissinger's, with the width of its interval, kJ/mol. */
function headlineEnergy(
  rows: readonly ParameterRow[],
  event: number,
): { valueJPerMol: number; width?: number } | undefined {
  const energies = rows.filter((row) => isHeadline(row, event) && row.quantity === 'activation_energy');
  const row =
    energies.find((r) => r.method === 'vyazovkin' && r.conversion === 0.5) ??
    energies.find((r) => r.method === 'kissinger');
  if (!row || !(row.value > 0)) return undefined;
  const width = row.lower95 === null || row.upper95 === null ? undefined : row.upper95 - row.lower95;
  return { valueJPerMol: row.value * 1e3, ...(width !== undefined && { width }) };
}

const fittedExponent = (rows: readonly ParameterRow[], event: number): number | undefined =>
  rows.find((row) => isHeadline(row, event) && row.quantity === 'avrami_exponent' && row.method === 'jmak')?.value;

/** Width of the band of a goal's time, decades. */
function decadesNow(forecasts: readonly ForecastRow[], conversion: number, temperatureK: number): { now?: number } {
  const row = forecasts.find(
    (r) =>
      r.method === 'shared_law' &&
      r.question === 'time_to_conversion' &&
      r.conversion === conversion &&
      r.temperature_C !== null &&
      Math.abs(r.temperature_C + 273.15 - temperatureK) < 1e-6,
  );
  if (!row || row.lower95 === null || row.upper95 === null || !(row.lower95 > 0)) return {};
  return { now: Math.log10(row.upper95 / row.lower95) };
}
