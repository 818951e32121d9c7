import { describe, expect, test } from 'vitest';
import { reduceScan } from '../../jobs/reduction/index.ts';
import type { ReducedScan, ReduceOutcome } from '../../schema/wire/reduced.ts';
import {
  arrheniusLawWithPeak,
  createProgramme,
  eventTruths,
  jmakLaw,
  rampProgramme,
} from '../study/generator/index.ts';
import { input, model, scanOf } from './simulated.ts';

const noisy = { noise: 0.003, drift: 0.03 };
const truth = eventTruths(model(), [0.1, 0.5, 0.9])[0];

function reduced(o: ReduceOutcome): ReducedScan & { codes: string[] } {
  if (!o.ok) throw new Error(o.reason);
  return { ...o.reduced, codes: o.reduced.flags.map((f) => f.code) };
}

/** T(0.5) within part of the width, heat within part of itself. */
function expectTrue({ events }: ReducedScan, widthPart: number, heatPart: number): void {
  expect(events).toHaveLength(1);
  expect(Math.abs(events[0].curve!.temperatureK[49] - truth.temperatureAtK[0.5])).toBeLessThan(
    widthPart * truth.widthK,
  );
  expect(Math.abs(events[0].enthalpyJPerKg! / 45e3 - 1)).toBeLessThan(heatPart);
}

describe('beside the event', () => {
  const glass = (widthsBelow: number) => ({
    temperatureK: truth.peakK - widthsBelow * truth.widthK,
    widthK: 1.2,
    stepJPerKgK: 600,
    overshootJPerKg: 0,
  });
  // A logistic step has its half height at its middle and its tangent two widths before it (identity).
  test.each([8, 4])('a glass transition %i widths below: midpoint and onset, event untouched', (widthsBelow) => {
    const m = model();
    m.sample.glassTransition = glass(widthsBelow);
    const r = reduced(reduceScan(scanOf(m, noisy), input()));
    expect(Math.abs(r.glassTransitionK! - m.sample.glassTransition.temperatureK)).toBeLessThan(0.4);
    expect(Math.abs(r.glassTransitionOnsetK! - (m.sample.glassTransition.temperatureK - 2.4))).toBeLessThan(0.8);
    expect(r.codes).not.toContain('glass-transition-overlap');
    expectTrue(r, 0.01, 0.02);
  });
  test('without one none is found, drift or not', () => {
    for (const drift of [0, 0.2]) {
      const r = reduced(reduceScan(scanOf(model(), { noise: 0.003, drift }), input()));
      expect(r.glassTransitionK).toBeUndefined();
    }
  });
  test('one that reaches into the event is told, and α below 0.1 is left out', () => {
    const m = model();
    m.sample.glassTransition = glass(1.6);
    const r = reduced(reduceScan(scanOf(m, noisy), input()));
    expect(r.codes).toContain('glass-transition-overlap');
    expect(r.events[0].usableFrom).toBe(0.1);
    expectTrue(r, 0.02, 0.06);
  });
  test.each([1.5, 1])('melting %f widths above: normalised by shape, α above 0.8 left out', (widthsAbove) => {
    const m = model();
    m.sample.melting = { temperatureK: truth.peakK + widthsAbove * truth.widthK, widthK: 1.2, enthalpyJPerKg: 45e3 };
    const r = reduced(reduceScan(scanOf(m, noisy), input()));
    expect(r.codes).toContain('melting-overlap');
    expect(r.events[0].usableTo).toBe(0.8);
    expect(Math.abs(r.meltingOnsetK! - m.sample.melting.temperatureK)).toBeLessThan(0.8 * truth.widthK);
    expectTrue(r, 0.015, 0.03);
    // The enthalpy of the sheet is taken where it is given.
    const known = reduced(reduceScan(scanOf(m, noisy), input({ crystallizationEnthalpyJPerKg: 45e3 })));
    expect(known.events[0].enthalpyJPerKg).toBeCloseTo(45e3, 6);
  });
  test('a drift of third order is not taken for a step between glass and crystal', () => {
    expectTrue(reduced(reduceScan(scanOf(model(), { noise: 0.003, drift: 0.2 }), input())), 0.005, 0.01);
  });
});

describe('two events', () => {
  const pair = (widthsApart: number, part = 1) => {
    const m = model({ programme: rampProgramme(560, 820, 1 / 3) });
    m.sample.events.push({
      temperature: arrheniusLawWithPeak(280e3, 700 + widthsApart * truth.widthK, 1 / 3),
      rate: jmakLaw(3),
      enthalpyJPerKg: 45e3 * part,
    });
    return m;
  };
  test('apart: both reduced, numbered by temperature, nothing merged', () => {
    const r = reduced(reduceScan(scanOf(pair(6), noisy), input()));
    expect(r.events.map((e) => e.event)).toEqual([1, 2]);
    expect(r.codes).not.toContain('events-merged');
    for (const e of r.events) expect(Math.abs(e.enthalpyJPerKg! / 45e3 - 1)).toBeLessThan(0.02);
  });
  // Aim: areas within 5 % at one width apart.
  test.each([
    [1.5, 1],
    [1, 1],
    [1, 0.6],
  ])('%f widths apart, areas 1 to %f: separated, areas within 5 %%', (apart, part) => {
    const m = pair(apart, part);
    const truths = eventTruths(m);
    const r = reduced(reduceScan(scanOf(m, noisy), input()));
    expect(r.codes.filter((c) => c === 'events-merged')).toHaveLength(2);
    expect(r.events).toHaveLength(2);
    r.events.forEach((e, k) => {
      expect(Math.abs(e.enthalpyJPerKg! / (k ? 45e3 * part : 45e3) - 1)).toBeLessThan(0.05);
      expect(Math.abs(e.peakK - truths[k].peakK)).toBeLessThan(0.02 * truths[k].widthK);
      expect(e.curve).toBeDefined();
    });
  });
  test('a single event is not split', () => {
    for (const n of [1, 1.5, 4]) {
      const m = model();
      m.sample.events[0].rate = jmakLaw(n);
      expect(reduced(reduceScan(scanOf(m, noisy), input())).events).toHaveLength(1);
    }
  });
});

describe('the signal', () => {
  test('spikes are bridged and told with their time', () => {
    const scan = scanOf(model(), noisy);
    const height = Math.max(...scan.heatFlow);
    scan.heatFlow[1000] += 3 * height;
    scan.heatFlow[2050] -= 3 * height;
    const r = reduced(reduceScan(scan, input()));
    expect(r.flags.find((f) => f.code === 'spike')?.detail).toContain(`${scan.timeS[1000].toPrecision(5)} s`);
    expectTrue(r, 0.01, 0.01);
  });
  test('a sharp event of a few rows is no spike', () => {
    expect(reduced(reduceScan(scanOf(model(), noisy, 130), input())).codes).not.toContain('spike');
  });
  test('a named reference is subtracted; one of another programme sets the scan aside', () => {
    const m = model();
    m.sample.heatCapacity = { jPerKgK: 3000, slopeJPerKgK2: 20, referenceK: 700 };
    const rescan = model({ sample: { ...m.sample, events: [{ ...m.sample.events[0], enthalpyJPerKg: 1e-3 }] } });
    const quiet = { noise: 0, drift: 0 };
    const r = reduced(reduceScan(scanOf(m, quiet), input({ reference: scanOf(rescan, quiet, 2500) })));
    expectTrue(r, 0.003, 0.003);
    // What is left beside the event is nothing, not the warming of the pan.
    expect(Math.abs(r.trace.heatFlow[5])).toBeLessThan(1e-3 * Math.max(...r.trace.heatFlow));
    const other = scanOf(model({ programme: rampProgramme(560, 800, 1 / 4) }), quiet);
    expect(reduceScan(scanOf(m, quiet), input({ reference: other }))).toMatchObject({
      ok: false,
      reason: expect.stringMatching(/different programmes/),
    });
  });
  test('a cut event keeps its peak temperature and has no curve', () => {
    const r = reduced(
      reduceScan(scanOf(model({ programme: rampProgramme(560, truth.peakK + 7, 1 / 3) }), noisy), input()),
    );
    expect(r.codes).toContain('event-cut');
    expect(r.events).toHaveLength(1);
    expect(r.events[0].curve).toBeUndefined();
    expect(Math.abs(r.events[0].peakK - truth.peakK)).toBeLessThan(0.06 * truth.widthK);
  });
  test('a known reference enthalpy gives the mass of a chip’s sample', () => {
    const o = reduceScan(scanOf(model(), noisy), input({ massKg: undefined, crystallizationEnthalpyJPerKg: 45e3 }));
    expect(reduced(o).massKg! / 10e-6).toBeCloseTo(1, 1);
    expect(reduced(o).flags.find((f) => f.code === 'mass-unknown')?.detail).toMatch(/10\.\d mg|9\.9\d mg/);
  });
  test('the step of a glass transition tells the direction of the exotherm', () => {
    const m = model();
    m.sample.glassTransition = { temperatureK: 640, widthK: 1.5, stepJPerKgK: 600, overshootJPerKg: 0 };
    for (const sign of [1, -1]) {
      const r = reduced(reduceScan(scanOf(m, noisy, 3000, sign), input({ exotherm: undefined })));
      expect(r.flags.find((f) => f.code === 'sign-inferred')?.detail).toMatch(/glass transition/);
      expectTrue(r, 0.01, 0.02);
    }
  });
  test('an instrument’s offset that changes with temperature and its heat factor are applied', () => {
    const calibration = { ...input().calibration, offsetSlope: 0.01, offsetAtK: 600, heatFactor: 1.1 };
    const plain = reduced(reduceScan(scanOf(model(), noisy), input())).events[0];
    const moved = reduced(reduceScan(scanOf(model(), noisy), input({ calibration }))).events[0];
    expect(plain.peakK - moved.peakK).toBeCloseTo(0.01 * (plain.peakK - 600), 2);
    expect(moved.area / plain.area).toBeCloseTo(1.1, 6);
  });
  test('self-heating from a known thermal resistance: told above 0.1, kept as a number', () => {
    // S = R_th φ_max E/(R T²): 280e3/(8.314 × 700²) = 0.0687 per K, φ_max near 45e3 × 1e-5 × (1/3)/11.5/1.08 = 12 mW.
    const calibration = { ...input().calibration, resistanceKPerW: 300 };
    const r = reduced(reduceScan(scanOf(model(), noisy), input({ calibration })));
    expect(r.codes).toContain('self-heating');
    expect(r.events[0].selfHeating! / (300 * 0.012 * 0.0687)).toBeGreaterThan(0.6);
    expect(r.events[0].selfHeating! / (300 * 0.012 * 0.0687)).toBeLessThan(1.6);
  });
});

describe('segments', () => {
  test('a hold after a fast ramp is an isothermal scan on the clock of the file', () => {
    const holdK = 672;
    const law = arrheniusLawWithPeak(280e3, 700, 1 / 3);
    const timeConstantS = Math.exp(-law.lnK(holdK));
    const programme = createProgramme(560, [
      { kind: 'ramp', rateKPerS: 5, toK: holdK },
      { kind: 'hold', durationS: 4 * timeConstantS },
    ]);
    const { events, segments, segment } = reduced(
      reduceScan(scanOf(model({ programme }), { noise: 0.003, drift: 0 }), input()),
    );
    expect(segments.map((s) => s.kind)).toEqual(['heating', 'hold']);
    expect(segment).toBe(2);
    expect(events[0]).toMatchObject({ kind: 'hold' });
    expect(events[0].holdK).toBeCloseTo(holdK, 1);
    expect(Math.abs(events[0].holdReachedS! - (holdK - 560) / 5)).toBeLessThan(1);
    // α = 1 − exp(−(K t)³) from the moment the hold is reached; the ramp before adds little.
    const halfS = Math.log(2) ** (1 / 3) * timeConstantS + (holdK - 560) / 5;
    expect(Math.abs(events[0].curve!.timeS[49] / halfS - 1)).toBeLessThan(0.02);
    expect(events[0].curve!.programmeTemperatureK[0]).toBeLessThan(561);
  });
  test('a change of rate within a heating splits it', () => {
    const programme = createProgramme(500, [
      { kind: 'ramp', rateKPerS: 2, toK: 620 },
      { kind: 'ramp', rateKPerS: 1 / 3, toK: 800 },
    ]);
    const r = reduced(reduceScan(scanOf(model({ programme }), noisy), input()));
    expect(r.segments.map((s) => s.rateKPerS.toFixed(2))).toEqual(['2.00', '0.33']);
    expect(r.segment).toBe(2);
    expectTrue(r, 0.01, 0.02);
  });
});
