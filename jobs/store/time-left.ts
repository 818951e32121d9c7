import type { Step } from './job-rows.ts';

/** What the last jobs of a step that ended took: ms each on average, and how many ran side by side. */
export interface StepPace {
  step: Step;
  meanMs: number;
  atOnce: number;
}

/**
 * What one job of each step takes beside the others, ms of processor time measured on the synthetic campaign: only their proportions
 * count, and only until a job of the step itself has ended.
 */
const WEIGHTS_MS: Record<Step, number> = {
  'read-sheet': 10,
  'unpack-archive': 200,
  'assign-scans': 95,
  'calibrate-instrument': 40,
  'read-scan': 70,
  'reduce-scan': 80,
  'fit-sample': 800,
  'judge-curvature': 440,
  'forecast-sample': 190,
  'plan-campaign': 40,
};

/**
 * Seconds until jobs to come are done, each step at its own pace; a step of which none has ended yet at the pace of the others in
 * proportion to its weight.
 * @returns null where no job of any step has ended
 */
export function secondsLeft(toCome: Partial<Record<Step, number>>, paces: readonly StepPace[]): number | null {
  const weight = paces.reduce((sum, { step }) => sum + WEIGHTS_MS[step], 0);
  if (weight === 0) return null;
  const scale = paces.reduce((sum, { meanMs }) => sum + meanMs, 0) / weight;
  const atOnce = paces.reduce((most, pace) => Math.max(most, pace.atOnce), 1);
  let ms = 0;
  for (const [step, count] of Object.entries(toCome) as [Step, number][]) {
    const own = paces.find((pace) => pace.step === step);
    // One job does not run side by side with itself.
    const beside = Math.max(1, Math.min(count, own?.atOnce ?? atOnce));
    ms += (count * (own?.meanMs ?? scale * WEIGHTS_MS[step])) / beside;
  }
  return ms / 1000;
}
