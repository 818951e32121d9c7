import { describe, expect, test } from 'vitest';
import { createEstimator, type EstimateSettings, rampIntegrals } from '../../jobs/kinetics/estimate.ts';
import { collectEvent } from '../../jobs/kinetics/event-data.ts';
import { fitVyazovkin } from '../../jobs/kinetics/isoconversional/vyazovkin.ts';
import { averageSegments } from '../../jobs/kinetics/model-free.ts';
import { exactScan, furnace } from './exact-curves.ts';

/** K, far beyond the scatter below, so that curves lie out of their places. */
const SHIFTS = [1.6, -2.4, 1.2, 2, -2.8];
/** Curves of several shapes, so that no one law goes through them. */
const EXPONENTS = [2.6, 3.2, 2.8, 3.4, 3];
const data = (energyJPerMol: number, shifts: number[]) =>
  collectEvent(
    1,
    [2, 5, 10, 20, 40].map((perMinute, i) =>
      exactScan(
        energyJPerMol,
        energyJPerMol / (8.314 * 700) - 4,
        EXPONENTS[i],
        perMinute / 60,
        450,
        `${perMinute}`,
        shifts[i],
      ),
    ),
    [furnace],
  );
const curves = Uint16Array.of(0, 1, 2, 3, 4);
const settings: EstimateSettings = {
  curves,
  weights: new Float64Array(5).fill(1),
  curveWeights: new Float64Array(5).fill(1),
  curveSigmaK: new Float64Array(5).fill(0.5),
  augisBennett: true,
  curveMethods: true,
  x0: 1 / 720,
};
const estimatorOf = (d: ReturnType<typeof data>) => createEstimator(d, settings, rampIntegrals(d, curves));

describe('a fit that begins at a neighbour', () => {
  // The identity: where a fit begins must not show in where it ends.
  const columns = data(250e3, SHIFTS);
  const scratch = estimatorOf(columns)();
  for (const [energy, what] of [
    [251e3, 'near'],
    [262e3, 'further away'],
  ] as const) {
    test(`${what}: JMAK ends where the fit from scratch does`, () => {
      const near = estimatorOf(columns)(estimatorOf(data(energy, [0, 0, 0, 0, 0]))());
      expect(near.jmak!.fit.converged).toBe(true);
      expect(Math.abs(near.jmak!.energy / scratch.jmak!.energy - 1)).toBeLessThan(1e-7);
      expect(Math.abs(near.jmak!.exponent / scratch.jmak!.exponent - 1)).toBeLessThan(1e-7);
    });
  }

  test('Vyazovkin’s E does not show where its integrals were made', () => {
    const work = Array.from(curves, () => ({ value: 0, byEnergy: 0, byEnergy2: 0 }));
    const ramp = rampIntegrals(columns, curves);
    for (const [k, E] of scratch.vyazovkin.entries()) {
      for (const start of [0.95, 1 - 2e-3, 1 + 2e-3, 1.05]) {
        const v = fitVyazovkin((e, out) => ramp.step(e, settings.x0, k, out), settings.curveWeights, start * E, work);
        expect(v.converged).toBe(true);
        expect(Math.abs(v.energy / E - 1), `${k} from ${start}`).toBeLessThan(1e-9);
      }
    }
  });

  test('the time of each step at the E found is that of integrals made there', () => {
    const work = Array.from(curves, () => ({ value: 0, byEnergy: 0, byEnergy2: 0 }));
    const made = averageSegments(
      rampIntegrals(columns, curves),
      settings.curveWeights,
      scratch.vyazovkin,
      settings.x0,
      work,
    );
    for (const [k, ln] of made.entries()) expect(Math.abs(scratch.lnStep[k] - ln), `${k}`).toBeLessThan(1e-8);
  });
});
