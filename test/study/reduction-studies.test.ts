import { expect, test } from 'vitest';
import { reduceHolds } from './holds.ts';
import { DIFFICULTIES, reduceSimulated } from './reduction.ts';
import { reduceTwoEvents } from './two-events.ts';

const difficulty = (name: string) => {
  const found = DIFFICULTIES.find((d) => d.name === name);
  if (!found) throw new Error(`no difficulty ${name}`);
  return found;
};

// The whole table: `npm run study -- reduction`. Aim: T(0.5) within 1 % of the width, Tp and ΔH within 2 %.
test.each([
  'plain: noise 0.3 %, drift 5 %, 100 points',
  'drift 20 %, parabola',
  'response 0.3 of the width',
  'glass transition 6 widths below',
  'glass transition 1.5 widths below',
  'glass transition 1 width below',
  'self-heating S = 0.1',
])('%s: three scans within the aim', (name) => {
  for (let index = 0; index < 3; index++) {
    const result = reduceSimulated(difficulty(name), 'test', index);
    expect(Math.abs(result.peak ?? 1), `${name} ${index}`).toBeLessThan(0.02);
    expect(Math.abs(result.half ?? 1), `${name} ${index}`).toBeLessThan(0.01);
    expect(Math.abs(result.enthalpy ?? 1), `${name} ${index}`).toBeLessThan(0.02);
  }
});

test('self-heating S = 0.5 with a known heat capacity: T(0.5) within 3 % of the width, Tp within 3 %', () => {
  for (let index = 0; index < 3; index++) {
    const result = reduceSimulated(difficulty('self-heating S = 0.5'), 'test', index);
    expect(Math.abs(result.peak ?? 1), `${index}`).toBeLessThan(0.03);
    expect(Math.abs(result.half ?? 1), `${index}`).toBeLessThan(0.03);
  }
});

test('noise that does not average out: the errors stated for Tp, T(0.5) and ΔH hold most of the truth', () => {
  const results = Array.from({ length: 8 }, (_, index) =>
    reduceSimulated(difficulty('pink noise 0.3 %'), 'test', index),
  );
  for (const key of ['peakInErrors', 'halfInErrors', 'enthalpyInErrors'] as const)
    expect(results.filter((r) => Math.abs(r[key] ?? 9) < 2).length, key).toBeGreaterThanOrEqual(7);
});

test.each([
  ['second event 1 width above, noise 1 %', 0.03],
  ['second event 1 width above, both of another law', 0.02],
  ['second event 1 width above, both JMAK, energies apart by 20 %', 0.02],
])('%s: the area of the first within %d', (name, within) => {
  for (let index = 0; index < 3; index++) {
    const { enthalpy = 1 } = reduceSimulated(difficulty(name), 'test', index);
    expect(Math.abs(enthalpy), `${index}`).toBeLessThan(within);
  }
});

test('two events 35 to 60 K apart: both Kissinger energies within 3 %', () => {
  for (const error of reduceTwoEvents('test', 0).errors) expect(Math.abs(error)).toBeLessThan(0.03);
});

test('five holds: n and E within 4 %', () => {
  const { exponentErrors, energyError, lost } = reduceHolds('test', 0);
  expect(lost).toBe(0);
  for (const error of exponentErrors) expect(Math.abs(error)).toBeLessThan(0.04);
  expect(Math.abs(energyError)).toBeLessThan(0.04);
});
