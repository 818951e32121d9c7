import type { ModelFreeCurve } from '../../schema/wire/forecasts.ts';
import { CONVERSION_GRID } from '../../schema/wire/reduced.ts';
import { type ArrheniusIntegral, addArrheniusIntegral } from '../laws/arrhenius-integral.ts';
import type { ProgrammeIntegrals } from './estimate.ts';
import { CONVERSION_COUNT, CONVERSIONS, type EventData } from './event-data.ts';

/**
 * ln of the time integral that each segment of conversion needs, ∫ exp[−(E_k/R)(1/T − x0)] dt, averaged over the scans in the logarithm. For a draw: called with the ramp integrals of the columns as that draw left them, so that the forecast moves with it.
 * @param weights one a curve scan   @param energy J/mol, one a segment
 */
export function averageSegments(
  integrals: ProgrammeIntegrals,
  weights: ArrayLike<number>,
  energy: ArrayLike<number>,
  x0: number,
  work: ArrheniusIntegral[],
): Float64Array {
  const out = new Float64Array(CONVERSION_COUNT);
  let total = 0;
  for (let j = 0; j < work.length; j++) total += weights[j];
  for (let k = 0; k < CONVERSION_COUNT; k++) {
    integrals.step(energy[k], x0, k, work);
    for (let j = 0; j < work.length; j++) out[k] += (weights[j] / total) * Math.log(work[j].value);
  }
  return out;
}

/** The model-free description of an event from its measured curves. @param energy J/mol by Vyazovkin, one a conversion of the table */
export function describeModelFree(
  data: EventData,
  curves: ArrayLike<number>,
  weights: ArrayLike<number>,
  measured: ProgrammeIntegrals,
  energy: Float64Array,
  x0PerK: number,
): ModelFreeCurve {
  const work: ArrheniusIntegral[] = Array.from({ length: curves.length }, emptyIntegral);
  return {
    conversions: Float64Array.from(CONVERSIONS),
    energyJPerMol: energy.slice(),
    lnStep: averageSegments(measured, weights, energy, x0PerK, work),
    share: averageShares(data, curves, weights, energy, x0PerK),
    x0PerK,
  };
}

const emptyIntegral = (): ArrheniusIntegral => ({ value: 0, byEnergy: 0, byEnergy2: 0 });

/** Share of its segment done at 0.01 … 0.99, averaged over the scans; above the last segment relative to that one. */
function averageShares(
  data: EventData,
  curves: ArrayLike<number>,
  weights: ArrayLike<number>,
  energy: Float64Array,
  x0: number,
): Float64Array {
  const out = new Float64Array(CONVERSION_GRID.length);
  let total = 0;
  for (let j = 0; j < curves.length; j++) total += weights[j];
  for (let j = 0; j < curves.length; j++) {
    const p = data.programmes[curves[j]];
    if (!p) throw new RangeError(`scan ${data.scans[curves[j]].file} has no curve`);
    const within = new Float64Array(CONVERSION_GRID.length);
    const whole = new Float64Array(CONVERSION_COUNT);
    const sum = emptyIntegral();
    let k = -1;
    CONVERSION_GRID.forEach((a, g) => {
      const found = CONVERSIONS.findIndex((c) => a <= c + 1e-9);
      const segment = found < 0 ? CONVERSION_COUNT - 1 : found;
      if (segment !== k) sum.value = 0;
      k = segment;
      const row = p.gridFrom + g;
      addArrheniusIntegral(p.timeS, p.temperatureK, g === 0 ? 0 : row - 1, row, energy[k], x0, sum);
      within[g] = sum.value;
      if (a <= CONVERSIONS[k] + 1e-9) whole[k] = sum.value;
    });

    CONVERSION_GRID.forEach((a, g) => {
      const found = CONVERSIONS.findIndex((c) => a <= c + 1e-9);
      out[g] += ((weights[j] / total) * within[g]) / whole[found < 0 ? CONVERSION_COUNT - 1 : found];
    });
  }
  return out;
}
