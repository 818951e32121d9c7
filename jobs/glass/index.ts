import type { Flag } from '../../schema/wire/flags.ts';
import type { ParameterRow } from '../../schema/wire/parameters.ts';
import type { EventVerdict, JudgeInput, JudgeResult } from '../../schema/wire/verdicts.ts';
import { studentQuantile } from '../numeric/distributions.ts';
import { glassOfEvent, readGlass } from './glass-layer.ts';
import { energyPlot, growthPlot, kissingerPlot, viscosityPlot } from './plots.ts';
import { localEnergyRows, type RowBase } from './rows.ts';
import { chooseScans } from './verdict/choose-scans.ts';
import { judgeEvent } from './verdict/judge-event.ts';

/**
 * Whether the bend of a sample's Kissinger plot is the material's or an instrument's, and the glass layer on top. For each
 * event: the verdict with all its evidence, the law over all scans with its draws, local energies, decoupling, stability numbers, plots.
 * Pure: the same input gives the same numbers, whatever order the scans came in.
 */
export function judgeCurvature(input: JudgeInput): JudgeResult {
  const flags: Flag[] = [];
  const parameters: ParameterRow[] = [];
  const events: EventVerdict[] = [];
  const sharedLaws: JudgeResult['sharedLaws'] = [];
  const glass = readGlass(input.sample, input.facts);
  flags.push(...glass.flags);
  parameters.push(...glass.rows);
  const numbers = [...new Set(input.scans.map((s) => s.event.event))].sort((a, b) => a - b);
  for (const event of numbers) {
    const chosen = chooseScans(
      input.sample,
      event,
      input.scans.filter((s) => s.event.event === event),
      input.facts,
    );
    flags.push(...chosen.flags);
    if (chosen.used.length === 0) continue;
    const {
      verdict,
      flags: more,
      judged,
      analysis,
      shared,
    } = judgeEvent(input, event, chosen.used, glass.glassTransitionK);
    flags.push(...more);
    const rates = chosen.used.map((s) => s.event.rateKPerS);
    const base: RowBase = {
      sample: input.sample,
      event,
      scan_count: chosen.used.length,
      rate_min_K_per_s: Math.min(...rates),
      rate_max_K_per_s: Math.max(...rates),
    };
    const layer = glassOfEvent(base, input.facts, glass, judged, shared);
    flags.push(...layer.flags);
    verdict.sentences.push(...layer.sentences);
    if (analysis) verdict.plots.push(kissingerPlot(judged, analysis));
    if (shared) {
      const codes = [...new Set(more.map((f) => f.code))];
      parameters.push(...localEnergyRows(base, shared, codes));
      sharedLaws.push({ law: shared.law, draws: shared.draws, degreesOfFreedom: shared.degrees });
      verdict.plots.push(energyPlot(shared, studentQuantile(0.975, shared.degrees)));
      if (glass.viscosity) {
        const { growthRateMPerS, growthTemperatureK } = input.facts;
        const anchor =
          growthRateMPerS !== undefined && growthTemperatureK !== undefined
            ? { rateMPerS: growthRateMPerS, temperatureK: growthTemperatureK }
            : undefined;
        verdict.plots.push(
          growthPlot(judged, shared, glass.viscosity, anchor),
          viscosityPlot(
            glass.fits.length > 0 ? glass.fits.map((f) => f.law) : [glass.viscosity],
            input.facts.viscosity ?? [],
            glass.viscosity.glassTransitionK,
            shared.law.highestMeasuredK,
          ),
        );
      }
    }
    parameters.push(...layer.rows);
    events.push(verdict);
  }
  return { verdicts: events.map((e) => e.row), events, parameters, sharedLaws, flags };
}
