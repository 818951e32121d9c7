import { type Flag, flag } from '../../schema/wire/flags.ts';
import type { Segment } from '../../schema/wire/reduced.ts';
import type { ReadScan } from '../../schema/wire/scan.ts';
import type { ReduceInput } from '../../schema/wire/step-inputs.ts';
import { interpolate, lowerBound } from '../numeric/local-polynomial.ts';
import { findExcursions, noiseSigma } from './find-event.ts';
import { findGlassTransition, GLASS_BEFORE, MOST_LEFT } from './glass-transition.ts';

/** +1 when the file's signal is exotherm up, −1 when it is down; `said` is false when it had to be worked out. */
export type Direction = { ok: true; sign: 1 | -1; flag?: Flag } | { ok: false; reason: string };

/** A second event counts as real, for telling the direction, from this part of the larger one on. */
const COUNTER_EVENT_PART = 0.1;
/** A glass transition tells the direction when it is this much clearer one way than the other (squared ratios to the error). */
const CLEARER = 4;

/**
 * Direction of the exotherm: the sheet's word, else the file's own, else inferred where physics allows: a glass transition's step is
 * endothermic; of two opposite events the one at lower temperature is the exotherm (crystals form before they melt); a single event is
 * one only below the sheet's melting temperature. The larger event is no guide: melting is larger than crystallisation.
 */
export function findDirection(
  scan: ReadScan,
  heatFlow: Float64Array,
  input: ReduceInput,
  heating: Segment[],
): Direction {
  const said = input.exotherm ?? scan.exotherm;
  if (said) return { ok: true, sign: said === 'up' ? 1 : -1 };
  const { timeS, temperatureK } = scan;
  const flipped = heatFlow.map((v) => -v);
  for (const s of heating) {
    const up = findExcursions(timeS, heatFlow, s.from, s.to)[0];
    const down = findExcursions(timeS, flipped, s.from, s.to)[0];
    if (!up && !down) continue;
    const T = (t: number) => interpolate(timeS, temperatureK, t);
    const where = { file: input.file, sample: input.sample, instrument: input.calibration.instrument };
    const action = 'Write up or down in the exotherm column of scans.csv; the scan is then reduced again.';
    const strongest = up && (!down || up.prominence > down.prominence) ? up : down;
    const leftS = Math.min(strongest.leftS, MOST_LEFT * strongest.rightS);
    const before = lowerBound(timeS, strongest.peakS - GLASS_BEFORE * leftS);
    const noise = noiseSigma(heatFlow, s.from, before);
    const foot = { height: strongest.prominence, ...strongest, leftS };
    const steps = [heatFlow, flipped].map((y) => findGlassTransition(timeS, y, s.from, before, noise, foot));
    // Seen the wrong way round, what lies beside a step can look like a small one.
    const [weightUp, weightDown] = steps.map((found) => found?.significance ?? 0);
    const step = weightUp > CLEARER * weightDown ? steps[0] : weightDown > CLEARER * weightUp ? steps[1] : undefined;
    if (step) {
      const detail = `No exotherm direction was given; the step at ${T(step.midpointS).toFixed(1)} K was taken for a glass transition, which is endothermic.`;
      return { ok: true, sign: step === steps[0] ? 1 : -1, flag: flag('sign-inferred', detail, action, where) };
    }
    if (
      up &&
      down &&
      Math.min(up.prominence, down.prominence) > COUNTER_EVENT_PART * Math.max(up.prominence, down.prominence)
    ) {
      const sign = up.peakS < down.peakS ? 1 : -1;
      const [exo, endo] = sign > 0 ? [T(up.peakS), T(down.peakS)] : [T(down.peakS), T(up.peakS)];
      const detail = `No exotherm direction was given; of the two opposite events at ${exo.toFixed(1)} K and ${endo.toFixed(1)} K the first was taken for crystallisation.`;
      return { ok: true, sign, flag: flag('sign-inferred', detail, action, where) };
    }
    const peakK = T(strongest.peakS);
    if (input.meltingK !== undefined && peakK < input.meltingK) {
      const detail = `No exotherm direction was given; the single event at ${peakK.toFixed(1)} K lies below the melting temperature ${input.meltingK.toFixed(1)} K and was taken for crystallisation.`;
      return { ok: true, sign: strongest === up ? 1 : -1, flag: flag('sign-inferred', detail, action, where) };
    }
    const bound =
      input.meltingK === undefined
        ? 'no melting temperature is known for the sample'
        : `it does not lie below the melting temperature ${input.meltingK.toFixed(1)} K`;
    return {
      ok: false,
      reason: `the exotherm direction is given neither in scans.csv nor in the file, and a single event at ${peakK.toFixed(1)} K cannot tell it: ${bound}`,
    };
  }
  return {
    ok: false,
    reason:
      'the exotherm direction is given neither in scans.csv nor in the file, and the scan shows no event that could tell it',
  };
}
