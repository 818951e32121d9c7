import { afterAll, describe, expect, it } from 'vitest';
import { computeInline } from '../../jobs/adapters/compute-inline.ts';
import { openComputeThreads } from '../../jobs/adapters/compute-threads.ts';
import { transferableBuffers } from '../../jobs/adapters/transfer.ts';
import type { Compute } from '../../jobs/ports/index.ts';
import type { ReduceInput } from '../../schema/wire/step-inputs.ts';

const threads = await openComputeThreads(1);
afterAll(() => threads.close());
const adapters: Record<string, Compute> = { 'compute-inline': computeInline, 'compute-threads': threads };

const INPUT: ReduceInput = {
  file: 'a.txt',
  sample: 'A',
  role: 'sample',
  exotherm: 'up',
  calibration: {
    instrument: 'oven',
    kind: 'furnace',
    source: 'prior',
    offsetK: 0,
    offsetSeK: 0.5,
    lagS: 0,
    lagSeS: 3,
    standards: 0,
  },
};

/** A bell of 6 K width at 600 K on a flat line, heated at 1/3 K/s. */
function bellText(): string {
  const rows = Array.from({ length: 1200 }, (_, i) => {
    const temperatureK = 500 + i / 6;
    return `${i / 2}\t${temperatureK}\t${Math.exp(-(((temperatureK - 600) / 6) ** 2)) + 1e-3 * Math.sin(97 * i)}`;
  });
  return `time [s]\ttemperature [K]\theat flow [mW]\n${rows.join('\n')}\n`;
}

describe.each(Object.entries(adapters))('%s', (_name, compute) => {
  it('reads bytes to columns and reduces them to an event', { timeout: 30_000 }, async () => {
    const read = await compute.readScan(new TextEncoder().encode(bellText()), 'a.txt');
    if (!read.ok) throw new Error(read.refusal.reason);
    expect(read.scan.timeS).toBeInstanceOf(Float64Array);
    expect(read.scan.timeS).toHaveLength(1200);
    const outcome = await compute.reduceScan(read.scan, INPUT);
    if (!outcome.ok) throw new Error(outcome.reason);
    expect(outcome.reduced.events).toHaveLength(1);
    expect(outcome.reduced.events[0].peakK).toBeCloseTo(600, 0);
    expect(outcome.reduced.events[0].curve?.timeS).toHaveLength(99);
  });

  it('gives a refusal as a value', async () => {
    expect(await compute.readScan(new TextEncoder().encode('no table here'), 'a.txt')).toMatchObject({ ok: false });
  });

  it('leaves a buffer alone that belongs to others too', async () => {
    const shared = new TextEncoder().encode(`junk${bellText()}`);
    await compute.readScan(shared.subarray(4), 'a.txt');
    expect(shared.byteLength).toBeGreaterThan(0);
  });

  it('rejects when a computation throws', async () => {
    await expect(
      compute.fitSample({ sample: 'A', scans: null, instruments: [], seed: '00', draws: 1 } as never),
    ).rejects.toThrow();
  });
});

it('both give the same numbers', { timeout: 30_000 }, async () => {
  const results = await Promise.all(
    Object.values(adapters).map(async (compute) => {
      const read = await compute.readScan(new TextEncoder().encode(bellText()), 'a.txt');
      return read.ok ? compute.reduceScan(read.scan, INPUT) : read;
    }),
  );
  expect(results[0]).toEqual(results[1]);
});

it('only whole buffers are handed over, each once', () => {
  const whole = new Float64Array(4);
  const part = new Float64Array(8).subarray(2, 4);
  expect(transferableBuffers({ a: whole, b: [{ c: whole }], part, text: 'x', none: null })).toEqual([whole.buffer]);
});
