import { describe, expect, test } from 'vitest';
import { reduceScan } from '../../jobs/reduction/index.ts';
import type { ReducedEvent } from '../../schema/wire/reduced.ts';
import type { ReduceInput } from '../../schema/wire/step-inputs.ts';
import { arrheniusLawWithPeak, createProgramme } from '../study/generator/index.ts';
import { input, model, scanOf } from './simulated.ts';

const scan = () => scanOf(model(), { noise: 0.003, drift: 0.05 });

function reduced(limitsK?: [number, number], over: Partial<ReduceInput> = {}): ReducedEvent[] {
  const outcome = reduceScan(scan(), input({ ...(limitsK && { limitsK }), ...over }));
  if (!outcome.ok) throw new Error(outcome.reason);
  return outcome.reduced.events;
}

describe('limits set by hand', () => {
  test('wide ones give what the automatic ones give', () => {
    const [automatic] = reduced();
    const [wide] = reduced([650, 740]);
    expect(Math.abs(wide.area / automatic.area - 1)).toBeLessThan(0.02);
    expect(Math.abs(wide.peakK - automatic.peakK)).toBeLessThan(0.1);
  });
  test('tie the baseline where they stand: a limit inside the event takes its tail away', () => {
    const [automatic] = reduced();
    const [narrow] = reduced([650, automatic.peakK + 0.35 * automatic.widthK]);
    expect(narrow.area).toBeLessThan(0.95 * automatic.area);
  });
  test('count on the corrected scale', () => {
    const calibration = { ...input().calibration, offsetK: 30 };
    // The file reads as before; the true temperatures lie 30 K lower, and so do the limits.
    const [shifted] = reduced([620, 710], { calibration });
    const [plain] = reduced([650, 740]);
    expect(shifted.area).toBeCloseTo(plain.area, 10);
    expect(shifted.peakK).toBeCloseTo(plain.peakK - 30, 6);
  });
  test('say nothing on a hold, and a flag says so', () => {
    const law = arrheniusLawWithPeak(280e3, 700, 1 / 3);
    const programme = createProgramme(560, [
      { kind: 'ramp', rateKPerS: 5, toK: 672 },
      { kind: 'hold', durationS: 4 * Math.exp(-law.lnK(672)) },
    ]);
    const held = (over: Partial<ReduceInput>) => {
      const outcome = reduceScan(scanOf(model({ programme }), { noise: 0.003, drift: 0 }, 6000), input(over));
      if (!outcome.ok) throw new Error(outcome.reason);
      return outcome.reduced;
    };
    const [free, limited] = [held({}), held({ limitsK: [670, 673] })];
    expect(limited.events).toEqual(free.events);
    expect(limited.flags.map((f) => f.code)).toEqual([...free.flags.map((f) => f.code), 'limits-unused'].sort());
  });
  test('around nothing find no event, and say so', () => {
    const outcome = reduceScan(scan(), input({ limitsK: [580, 640] }));
    expect(outcome.ok && outcome.reduced.events).toEqual([]);
    expect(outcome.ok && outcome.reduced.flags.map((f) => f.code)).toContain('no-event');
  });
});
