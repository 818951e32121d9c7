import { expect, test } from 'vitest';
import { rampProgramme } from './programme.ts';
import { samplingTimes } from './recording.ts';
import { METALS, solveStandard } from './standards.ts';

const MASS = 8e-6;
const RATE = 10 / 60;

const melt = (responseS: number) => {
  const programme = rampProgramme(METALS.In.meltingK - 20, METALS.In.meltingK + 30, RATE);
  const instrument = { offsetK: 0.4, shiftS: 2, responseS };
  return solveStandard(METALS.In, instrument, 1.2, programme, MASS, samplingTimes(0, programme.endS, 6001));
};

test('the leading edge is straight and starts shift × rate late; its slope is m c_p β/contact', () => {
  const { timeS, programmeK, eventW, conversion } = melt(0);
  const molten = conversion[0].findIndex((value) => value > 0);
  const done = conversion[0].findIndex((value) => value >= 1);
  expect(programmeK[molten]).toBeCloseTo(METALS.In.meltingK + 2 * RATE, 1);
  const k = done - 5;
  const slope = (eventW[k] - eventW[k - 20]) / (timeS[k] - timeS[k - 20]);
  expect(slope / ((MASS * METALS.In.heatCapacityJPerKgK * RATE) / 1.2)).toBeCloseTo(1, 4);
  // The tangent of the edge meets the level before it at T_m + shift × rate.
  expect(programmeK[k] - (eventW[k] / slope) * RATE).toBeCloseTo(METALS.In.meltingK + 2 * RATE, 4);
});

test('a response moves that tangent by its own time constant and the area stays m ΔH', () => {
  const { timeS, programmeK, eventW, conversion } = melt(1.5);
  const k = conversion[0].findIndex((value) => value >= 1) - 5;
  const slope = (eventW[k] - eventW[k - 20]) / (timeS[k] - timeS[k - 20]);
  expect(programmeK[k] - (eventW[k] / slope) * RATE).toBeCloseTo(METALS.In.meltingK + 3.5 * RATE, 3);
  const last = timeS.findIndex((t) => t > timeS[k] + 60);
  const from = timeS.findIndex((t) => t > 60);
  let sum = 0;
  for (let i = from; i < last; i++) sum += ((eventW[i] + eventW[i + 1]) / 2) * (timeS[i + 1] - timeS[i]);
  expect(sum / (MASS * METALS.In.enthalpyJPerKg)).toBeCloseTo(1, 4);
});

test('after melting the tail falls as exp(−t/contact) when nothing else is slow', () => {
  const { timeS, eventW, conversion } = melt(0);
  const k = conversion[0].findIndex((value) => value >= 1) + 10;
  const later = k + 300;
  expect(Math.log(eventW[k] / eventW[later]) / (timeS[later] - timeS[k])).toBeCloseTo(1 / 1.2, 3);
});
