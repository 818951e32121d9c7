import { describe, expect, test } from 'vitest';
import { reduceScan } from '../../jobs/reduction/index.ts';
import type { ReduceOutcome } from '../../schema/wire/reduced.ts';
import type { ReadScan } from '../../schema/wire/scan.ts';
import {
  createProgramme,
  eventTruths,
  type RecordingSettings,
  rampProgramme,
  seededRandom,
} from '../study/generator/index.ts';
import { input, model, scanOf } from './simulated.ts';

const clean: RecordingSettings = { noise: 0, drift: 0 };
function only(o: ReduceOutcome) {
  if (!o.ok) throw new Error(o.reason);
  expect(o.reduced.events).toHaveLength(1);
  return { event: o.reduced.events[0], flags: o.reduced.flags.map((f) => f.code), reduced: o.reduced };
}

describe('against the independent generator', () => {
  const truth = eventTruths(model(), [0.05, 0.1, 0.5, 0.9, 0.95])[0];

  test.each<[string, RecordingSettings, number]>([
    ['noise-free', clean, 0.2],
    ['5 % curved drift', { noise: 0, drift: 0.05, driftOrder: 2 }, 0.4],
    ['0.3 % noise and drift', { noise: 0.003, drift: 0.05, driftOrder: 2 }, 1],
    ['1 % noise and drift', { noise: 0.01, drift: 0.05, driftOrder: 2 }, 2],
  ])('%s: peak, T(α), width and enthalpy', (_, recording, percentOfWidth) => {
    const { event } = only(reduceScan(scanOf(model(), recording), input()));
    const allowed = (percentOfWidth / 100) * truth.widthK;
    expect(Math.abs(event.peakK - truth.peakK)).toBeLessThan(allowed);
    expect(Math.abs(event.widthK - truth.widthK)).toBeLessThan(2 * allowed);
    expect(Math.abs(event.curve!.temperatureK[49] - truth.temperatureAtK[0.5])).toBeLessThan(allowed / 2);
    expect(Math.abs(event.curve!.temperatureK[9] - truth.temperatureAtK[0.1])).toBeLessThan(2 * allowed);
    expect(Math.abs(event.curve!.temperatureK[89] - truth.temperatureAtK[0.9])).toBeLessThan(2 * allowed);
    expect(Math.abs(event.enthalpyJPerKg! / 45e3 - 1)).toBeLessThan(0.02);
    expect(event.rateKPerS).toBeCloseTo(1 / 3, 5);
  });

  test('shift, response and offset on the sheet are undone: T(α) within 1 % of the width, rate within 2 %', () => {
    const instrument = { offsetK: 1.2, shiftS: 3, responseS: 4 };
    const m = model({ instrument });
    const lagged = eventTruths(m, [0.1, 0.5, 0.9])[0];
    const calibration = { ...input().calibration, offsetK: 1.2, lagS: 7, responseS: 4 };
    const { event } = only(reduceScan(scanOf(m, clean), input({ calibration })));
    const allowed = 0.01 * truth.widthK;
    expect(Math.abs(event.peakK - lagged.peakK)).toBeLessThan(allowed);
    for (const [k, a] of [
      [9, 0.1],
      [49, 0.5],
      [89, 0.9],
    ]) {
      expect(Math.abs(event.curve!.temperatureK[k] - lagged.temperatureAtK[a])).toBeLessThan(allowed);
    }
    const top = Math.max(...event.curve!.ratePerS);
    expect(Math.abs(top / lagged.ratePerS - 1)).toBeLessThan(0.02);
    // Left in, the lag would show: the check above is not met by doing nothing.
    const ignored = only(reduceScan(scanOf(m, clean), input())).event;
    expect(Math.abs(ignored.peakK - lagged.peakK)).toBeGreaterThan(5 * allowed);
  });

  test('a crystal–glass step in heat capacity does not move α: conversion-weighted baseline', () => {
    const m = model();
    m.sample.crystalStepJPerKgK = -200;
    m.sample.heatCapacity = { jPerKgK: 400, slopeJPerKgK2: 0, referenceK: 650 };
    const { event } = only(reduceScan(scanOf(m, clean), input()));
    expect(Math.abs(event.curve!.temperatureK[49] - truth.temperatureAtK[0.5])).toBeLessThan(0.005 * truth.widthK);
    expect(Math.abs(event.enthalpyJPerKg! / 45e3 - 1)).toBeLessThan(0.01);
  });

  test('a glass transition six widths before the peak is left out of the baseline', () => {
    const m = model();
    m.sample.glassTransition = {
      temperatureK: truth.peakK - 6 * truth.widthK,
      widthK: 6,
      stepJPerKgK: 300,
      overshootJPerKg: 0,
    };
    m.sample.heatCapacity = { jPerKgK: 400, slopeJPerKgK2: 0, referenceK: 650 };
    const { event } = only(reduceScan(scanOf(m, { noise: 0.002, drift: 0 }), input()));
    expect(Math.abs(event.curve!.temperatureK[49] - truth.temperatureAtK[0.5])).toBeLessThan(0.02 * truth.widthK);
    expect(Math.abs(event.enthalpyJPerKg! / 45e3 - 1)).toBeLessThan(0.05);
  });

  test('the same data upside down with exotherm down give the same event', () => {
    const up = only(reduceScan(scanOf(model(), clean), input())).event;
    const down = only(reduceScan(scanOf(model(), clean, 3000, -1), input({ exotherm: 'down' }))).event;
    expect(down.peakK).toBe(up.peakK);
    expect(down.area).toBe(up.area);
  });
});

describe('direction', () => {
  const melting = model();
  melting.sample.melting = { temperatureK: 770, widthK: 3, enthalpyJPerKg: 90e3 };
  test.each([1, -1])('two opposite events: the first is the exotherm, whatever its sign (%d), flagged', (sign) => {
    const { event, flags } = only(
      reduceScan(scanOf(melting, { noise: 0.003, drift: 0 }, 3000, sign), input({ exotherm: undefined })),
    );
    expect(event.peakK).toBeGreaterThan(690);
    expect(event.peakK).toBeLessThan(710);
    expect(flags).toContain('sign-inferred');
  });
  test('a single event is an exotherm only below a known melting temperature', () => {
    const scan = scanOf(model(), { noise: 0.003, drift: 0 });
    const known = only(reduceScan(scan, input({ exotherm: undefined, meltingK: 900 })));
    expect(known.flags).toContain('sign-inferred');
    const unknown = reduceScan(scan, input({ exotherm: undefined }));
    expect(unknown).toMatchObject({ ok: false, code: 'sign-unknown' });
    expect(!unknown.ok && unknown.reason).toMatch(/no melting temperature is known/);
    expect(reduceScan(scan, input({ exotherm: undefined, meltingK: 650 }))).toMatchObject({
      ok: false,
      code: 'sign-unknown',
    });
  });
});

describe('flags and refusals', () => {
  const noisy = { noise: 0.003, drift: 0 };
  test('a wrong nominal rate is told with both rates, and the measured one is used', () => {
    const o = reduceScan(scanOf(model(), noisy), input({ rateNominalKPerS: 0.4 }));
    const { event, flags } = only(o);
    expect(flags).toContain('rate-off-nominal');
    expect(event.rateKPerS).toBeCloseTo(1 / 3, 4);
    expect(only(reduceScan(scanOf(model(), noisy), input({ rateNominalKPerS: 0.335 }))).flags).not.toContain(
      'rate-off-nominal',
    );
  });
  test('an event cut by the end of the scan is not normalised', () => {
    const m = model({ programme: rampProgramme(560, truth700() + 6, 1 / 3) });
    const o = reduceScan(scanOf(m, noisy), input());
    expect(o.ok && o.reduced.flags.map((f) => f.code)).toContain('event-cut');
    expect(o.ok && o.reduced.events.every((e) => e.curve === undefined)).toBe(true);
  });
  test('a scan without an event is reduced with no-event', () => {
    const o = reduceScan(flat(), input());
    expect(o.ok && o.reduced.events).toEqual([]);
    expect(o.ok && o.reduced.flags.map((f) => f.code)).toEqual(['no-event']);
  });
  test('12 points over the width: temperatures only, few-points', () => {
    const { event, flags } = only(reduceScan(scanOf(model(), noisy, 220), input()));
    expect(event.pointsOverWidth).toBeLessThan(20);
    expect(event.curve).toBeUndefined();
    expect(flags).toContain('few-points');
    expect(Math.abs(event.peakK - truth700())).toBeLessThan(0.03 * event.widthK);
  });
  test('a lag of unknown make-up that matters is told', () => {
    const calibration = { ...input().calibration, lagS: 8, responseS: undefined };
    expect(only(reduceScan(scanOf(model(), noisy), input({ calibration }))).flags).toContain('response-unknown');
  });
  test('a voltage without a sensitivity is refused with what to do; with one it is power', () => {
    const scan = { ...scanOf(model(), noisy), heatFlowUnit: 'V' as const };
    expect(reduceScan(scan, input())).toMatchObject({ ok: false, action: expect.stringMatching(/sensitivity/) });
    const calibration = { ...input().calibration, sensitivityVPerW: 2 };
    const volts = only(reduceScan(scan, input({ calibration }))).event;
    expect(volts.enthalpyJPerKg! * 2).toBeCloseTo(
      only(reduceScan(scanOf(model(), noisy), input())).event.enthalpyJPerKg!,
      3,
    );
  });
  test('segments: the heating after a cooling is found, one asked for is used, a wrong one is refused with the list', () => {
    const programme = createProgramme(620, [
      { kind: 'ramp', toK: 560, rateKPerS: 1 },
      { kind: 'ramp', toK: 800, rateKPerS: 1 / 3 },
    ]);
    const scan = scanOf(model({ programme }), noisy, 4000);
    const { event, reduced } = only(reduceScan(scan, input()));
    expect(reduced.segments.map((s) => s.kind)).toEqual(['cooling', 'heating']);
    expect(reduced.segment).toBe(2);
    expect(Math.abs(event.peakK - truth700())).toBeLessThan(0.3);
    expect(reduceScan(scan, input({ segment: 5 }))).toMatchObject({
      ok: false,
      reason: expect.stringMatching(/1 cooling, 2 heating/),
    });
    const cooling = reduceScan(scan, input({ segment: 1 }));
    expect(cooling.ok && cooling.reduced.flags.map((f) => f.code)).toEqual(['no-event', 'cooling']);
  });
});

const truth700 = (): number => eventTruths(model(), [0.5])[0].peakK;

function flat(): ReadScan {
  const random = seededRandom('flat');
  const n = 2000;
  return {
    timeS: Float64Array.from({ length: n }, (_, i) => i),
    temperatureK: Float64Array.from({ length: n }, (_, i) => 400 + i / 10),
    heatFlow: Float64Array.from({ length: n }, (_, i) => 1e-3 * (1 + 0.1 * (i / n) ** 2 + 0.003 * random.normal())),
    heatFlowUnit: 'W',
    columns: [],
    dialect: '',
    flags: [],
  };
}
