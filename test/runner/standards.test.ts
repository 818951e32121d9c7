import { describe, expect, it } from 'vitest';
import { correctScan } from '../../jobs/store/index.ts';
import { forEachTest } from './each-test.ts';
import { allTables, drain, newCampaign, rowsOf, send, type TestPorts } from './test-ports.ts';

const HEAD = 'file,sample,instrument,role,mass [mg],reference\n';
const SHEET = `${HEAD}a1.txt,A,oven,,1,\na2.txt,A,oven,,1,\nb1.txt,B,stove,,1,\nin1.txt,In,oven,standard,5,\nin2.txt,In,oven,standard,5,\nin3.txt,In,oven,standard,5,\n`;
/** Melting as measured: late by 1 K + 2 s × rate (arithmetic in place of the science). */
const FILES: readonly (readonly [string, string])[] = [
  ['a1.txt', 'rate 1'],
  ['a2.txt', 'rate 2'],
  ['b1.txt', 'rate 5'],
  ['in1.txt', 'rate 1 melts late 1 lag 2'],
  ['in2.txt', 'rate 0.5 melts late 1 lag 2'],
  ['in3.txt', 'rate 0.1 melts late 1 lag 2'],
];

let ports: TestPorts;
let campaign: string;
forEachTest((p, c) => {
  [ports, campaign] = [p, c];
});

const instrument = async (name: string) =>
  (await rowsOf(ports, campaign, 'instruments')).find((row) => row.instrument === name)!;
const sendAll = async () => {
  await send(ports, campaign, 'scans.csv', SHEET);
  for (const [path, text] of FILES) await send(ports, campaign, path, text);
};

describe('standards', () => {
  it('calibrate their instrument, and only its scans follow', async () => {
    await sendAll();
    await drain(ports, campaign);
    // The lines are exact, so the fit finds the offset and the lag that were put in.
    const oven = await instrument('oven');
    expect(oven).toMatchObject({ source: 'standards', standards: 3 });
    expect(oven.offset_K).toBeCloseTo(1, 6);
    expect(oven.lag_s).toBeCloseTo(2, 6);
    expect(oven.heat_factor).toBeGreaterThan(0);
    expect(await instrument('stove')).toMatchObject({ source: 'prior', standards: 0, heat_factor: null });
    const gaps = (await rowsOf(ports, campaign, 'gaps')).filter((row) => row.code === 'no-standard');
    expect(gaps).toHaveLength(1);
    expect(gaps[0].detail).toContain('stove');
    expect(ports.compute.counts.reduceScan).toBe(6);

    // Another standard: it is reduced, then the two scans of its instrument; the other instrument is left alone.
    await send(ports, campaign, 'in4.txt', 'rate 0.2 melts late 5 lag 2');
    await send(ports, campaign, 'scans.csv', `${SHEET}in4.txt,In,oven,standard,5,\n`);
    await drain(ports, campaign);
    expect(ports.compute.counts.reduceScan).toBe(9);
    expect((await instrument('oven')).standards).toBe(4);
  });

  it('give the same tables whoever comes first, and again when one is taken out and put back', async () => {
    await sendAll();
    await drain(ports, campaign);
    const expected = await allTables(ports, campaign);
    const other = await newCampaign(ports, 'other');
    for (const [path, text] of [...FILES].reverse()) {
      await send(ports, other, path, text);
      if (path === 'in2.txt') await drain(ports, other);
    }
    await drain(ports, other);
    await send(ports, other, 'scans.csv', SHEET);
    await drain(ports, other);
    expect(await allTables(ports, other)).toBe(expected);

    const [{ id }] = await ports.database.read.all<{ id: string }>(
      `select s.id from scans s join files f on f.id = s.file_id where f.path = 'in1.txt' and s.campaign_id = '${campaign}'`,
    );
    await correctScan(ports, id, { excluded: 'oxidised' });
    await drain(ports, campaign);
    expect((await instrument('oven')).standards).toBe(2);
    await correctScan(ports, id, { excluded: null });
    await drain(ports, campaign);
    expect(await allTables(ports, campaign)).toBe(expected);
  });

  it('that cannot be used are said', async () => {
    await send(ports, campaign, 'scans.csv', `${HEAD}x.txt,mystery,oven,standard,5,\ny.txt,In,oven,standard,5,\n`);
    await send(ports, campaign, 'x.txt', 'rate 1 melts late 1 lag 2');
    await send(ports, campaign, 'y.txt', 'rate 1');
    await drain(ports, campaign);
    const flags = (await rowsOf(ports, campaign, 'flags')).filter((row) => row.code === 'standard-unused');
    expect(flags.map((row) => row.file)).toEqual(['y.txt', 'x.txt']);
    expect(await instrument('oven')).toMatchObject({ source: 'prior', standards: 0 });
    await send(ports, campaign, 'samples.csv', 'sample,melting temperature [K]\nmystery,500\n');
    await drain(ports, campaign);
    expect((await instrument('oven')).standards).toBe(1);
  });
});

describe('a reference', () => {
  const withReference = (name: string) => `${HEAD}a1.txt,A,oven,,1,${name}\na2.txt,A,oven,,1,\n`;
  const rowOf = async (file: string) => (await rowsOf(ports, campaign, 'scans')).find((row) => row.file === file)!;

  it('is waited for, subtracted, and subtracted again when its bytes change', async () => {
    await send(ports, campaign, 'scans.csv', withReference('blank.txt'));
    await send(ports, campaign, 'a1.txt', 'rate 1');
    await send(ports, campaign, 'a2.txt', 'rate 2');
    await drain(ports, campaign);
    expect(await rowOf('a1.txt')).toMatchObject({
      status: 'set_aside',
      reason: 'its reference «blank.txt» did not come',
      flags: ['reference-unused'],
    });
    await send(ports, campaign, 'blanks/blank.txt', 'rate 1 blank');
    await drain(ports, campaign);
    const first = await rowOf('a1.txt');
    expect(first.status).toBe('reduced');
    expect(await rowOf('blanks/blank.txt')).toMatchObject({ status: 'unassigned', flags: [] });
    const counts = { ...ports.compute.counts };
    await send(ports, campaign, 'blanks/blank.txt', 'rate 1 another blank');
    await drain(ports, campaign);
    expect((await rowOf('a1.txt')).peak_K).not.toBe(first.peak_K);
    expect(ports.compute.counts.reduceScan - counts.reduceScan).toBe(1);
  });

  it('that is ambiguous or cannot be read sets the scan aside with the reason', async () => {
    await send(ports, campaign, 'scans.csv', withReference('blank.txt'));
    await send(ports, campaign, 'a1.txt', 'rate 1');
    await send(ports, campaign, 'x/blank.txt', 'rate 1 x');
    await send(ports, campaign, 'y/blank.txt', 'rate 1 y');
    await drain(ports, campaign);
    expect((await rowOf('a1.txt')).reason).toContain('is the name of 2 files');
    await send(ports, campaign, 'scans.csv', withReference('z/blank.txt'));
    await send(ports, campaign, 'z/blank.txt', 'bad blank');
    await drain(ports, campaign);
    expect((await rowOf('a1.txt')).reason).toBe(
      'its reference «z/blank.txt» could not be read: «bad blank» is no scan',
    );
  });
});
