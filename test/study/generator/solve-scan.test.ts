import { expect, test } from 'vitest';
import { eventTruths } from './event-truth.ts';
import { createProgramme, rampProgramme } from './programme.ts';
import { jmakLaw } from './rate-laws.ts';
import type { ScanModel } from './scan-model.ts';
import { solveScan } from './solve-scan.ts';
import { arrheniusLawWithPeak } from './temperature-laws.ts';

const RATE = 20 / 60;
const MASS = 5e-6;

const crystallising = (changes: Partial<ScanModel> = {}): ScanModel => ({
  sample: {
    events: [{ temperature: arrheniusLawWithPeak(250e3, 600, RATE), rate: jmakLaw(3), enthalpyJPerKg: 40e3 }],
  },
  instrument: { offsetK: 0, shiftS: 0, responseS: 0 },
  programme: rampProgramme(500, 700, RATE),
  massKg: MASS,
  ...changes,
});

const evenTimes = (endS: number, count: number): Float64Array =>
  Float64Array.from({ length: count }, (_, k) => (endS * k) / (count - 1));

/** ∫ y dt by the trapezoid, which is spectrally exact for a signal that vanishes at both ends. */
const area = (t: Float64Array, y: Float64Array): number =>
  y.reduce((sum, value, k) => (k === 0 ? 0 : sum + ((value + y[k - 1]) / 2) * (t[k] - t[k - 1])), 0);

/** Time centroid, s */
const centroid = (t: Float64Array, y: Float64Array): number =>
  area(
    t,
    y.map((v, k) => v * t[k]),
  ) / area(t, y);

test('the sample trails the programme as the linear equation says: closed form', () => {
  const shiftS = 4;
  const model = crystallising({ instrument: { offsetK: 0, shiftS, responseS: 0 } });
  const { timeS, programmeK, sampleK } = solveScan(model, evenTimes(600, 61));
  for (let k = 0; k < timeS.length; k++) {
    const trail = RATE * shiftS * -Math.expm1(-timeS[k] / shiftS);
    expect(Math.abs(programmeK[k] - trail - sampleK[k])).toBeLessThan(1e-8);
  }
});

test('plain warming behind shift and response: closed form of two first-order stages', () => {
  const [a, b, capacity] = [4, 1.5, 900];
  const model = crystallising({
    sample: { events: [], heatCapacity: { jPerKgK: capacity, slopeJPerKgK2: 0, referenceK: 500 } },
    instrument: { offsetK: 0, shiftS: a, responseS: b },
  });
  const { timeS, signalW } = solveScan(model, evenTimes(60, 61));
  for (let k = 0; k < timeS.length; k++) {
    const t = timeS[k];
    const exact = -MASS * capacity * RATE * (1 - (a * Math.exp(-t / a) - b * Math.exp(-t / b)) / (a - b));
    expect(Math.abs(signalW[k] - exact)).toBeLessThan(1e-10 * MASS * capacity * RATE);
  }
});

test('a response keeps the area and moves the centroid by exactly its time constant', () => {
  const times = evenTimes(600, 20001);
  const sharp = solveScan(crystallising(), times);
  for (const responseS of [2, 10]) {
    const smeared = solveScan(crystallising({ instrument: { offsetK: 0, shiftS: 0, responseS } }), times);
    expect(area(times, smeared.eventW) / (MASS * 40e3)).toBeCloseTo(1, 8);
    expect(centroid(times, smeared.eventW) - centroid(times, sharp.eventW)).toBeCloseTo(responseS, 6);
  }
});

test('self-heating warms the sample, loses no heat, and vanishes with its time constant', () => {
  const times = evenTimes(600, 20001);
  const heated = (contactS: number) => crystallising({ selfHeating: { contactS, heatCapacityJPerKgK: 500 } });
  const plain = solveScan(crystallising(), times);
  const warm = solveScan(heated(1), times);
  expect(area(times, warm.eventW) / (MASS * 40e3)).toBeCloseTo(1, 8);
  const excess = Math.max(...warm.sampleK.map((value, k) => value - plain.sampleK[k]));
  // θ ≈ contact (ΔH/c_p) dα/dt at the peak, less what the smearing takes.
  const quasiStatic = (40e3 / 500) * Math.max(...warm.ratePerS[0]);
  expect(excess / quasiStatic).toBeGreaterThan(0.9);
  expect(excess / quasiStatic).toBeLessThan(1);
  const [faint] = eventTruths(heated(0.02));
  const [none] = eventTruths(crystallising());
  expect(Math.abs(faint.peakK - none.peakK)).toBeLessThan(0.1);
});

test('the programme joins ramp and hold without a slip', () => {
  const legs = [
    { kind: 'ramp', rateKPerS: 5, toK: 590 },
    { kind: 'hold', durationS: 400 },
    { kind: 'ramp', rateKPerS: 2, toK: 400 },
  ] as const;
  const model = crystallising({ programme: createProgramme(400, legs) });
  const { programmeK, conversion } = solveScan(model, Float64Array.of(0, 38, 100, 438, 533));
  expect([...programmeK]).toEqual([400, 590, 590, 590, 400].map((value) => expect.closeTo(value, 9)));
  // A hold after a fast ramp: X grows by K t, closed form, from what the ramp has left.
  const { temperature } = model.sample.events[0];
  const extended = (alpha: number): number => (-Math.log1p(-alpha)) ** (1 / 3);
  expect(extended(conversion[0][2]) - extended(conversion[0][1])).toBeCloseTo(Math.exp(temperature.lnK(590)) * 62, 9);
});
