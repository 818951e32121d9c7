import { expect, test } from 'vitest';
import { createStepper, integrate, TIGHT } from './integrator.ts';

// Closed form, no source needed: y' = y cos t, y(0) = 1 has y = exp(sin t).
const swing = (t: number, y: Float64Array, out: Float64Array): void => {
  out[0] = y[0] * Math.cos(t);
};

test('with fixed steps the error falls as the fifth power of the step', () => {
  const errorWith = (steps: number): number => {
    const { step } = createStepper(swing, 1);
    let y = Float64Array.of(1);
    let next = new Float64Array(1);
    const error = new Float64Array(1);
    for (let k = 0; k < steps; k++) {
      step((2 * k) / steps, y, 2 / steps, next, error);
      [y, next] = [next, y];
    }
    return Math.abs(y[0] - Math.exp(Math.sin(2)));
  };
  for (const steps of [20, 40]) {
    const order = Math.log2(errorWith(steps) / errorWith(2 * steps));
    expect(order).toBeGreaterThan(4.7);
    expect(order).toBeLessThan(5.4);
  }
});

test('the error estimate falls as the fifth power too, being that of a fourth-order step', () => {
  const estimate = (h: number): number => {
    const { step } = createStepper(swing, 1);
    const error = new Float64Array(1);
    step(0.3, Float64Array.of(1), h, new Float64Array(1), error);
    return Math.abs(error[0]);
  };
  expect(Math.log2(estimate(0.1) / estimate(0.05))).toBeCloseTo(5, 0);
});

test('adaptive steps keep the global error within a hundred tolerances, over ten turns', () => {
  const times = Float64Array.from({ length: 50 }, (_, k) => (k + 1) * 1.3);
  for (const relativeTolerance of [1e-6, 1e-9, TIGHT.relativeTolerance]) {
    let worst = 0;
    integrate(
      swing,
      0,
      [1],
      times,
      (_, t, y) => {
        worst = Math.max(worst, Math.abs(y[0] / Math.exp(Math.sin(t)) - 1));
      },
      { relativeTolerance, absoluteTolerance: 1e-14 },
    );
    expect(worst / relativeTolerance).toBeLessThan(100);
  }
});

test('times that run backwards are refused with the values', () => {
  expect(() => integrate(swing, 0, [1], [1, 0.5], () => {})).toThrow(/time 1 is 0.5 after 1/);
});

test('a solution that blows up ends in an error, not in silence', () => {
  // y' = y², y(0) = 1 is infinite at t = 1.
  const blowUp = (_: number, y: Float64Array, out: Float64Array): void => {
    out[0] = y[0] ** 2;
  };
  expect(() => integrate(blowUp, 0, [1], [2], () => {})).toThrow(/stuck/);
});
