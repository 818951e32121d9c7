import { mkdtemp, rm } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { closePorts, openNodePorts } from '../../jobs/adapters/node-ports.ts';
import type { Ports } from '../../jobs/ports/index.ts';
import { createRunner } from '../../jobs/runner/index.ts';
import { answerCalibration } from '../../jobs/steps/answer-calibration.ts';
import { correctScan, createCampaign, listInstruments, listSampleScans, receiveFile } from '../../jobs/store/index.ts';
import {
  arrheniusLawWithPeak,
  buildCampaign,
  jmakLaw,
  METALS,
  PLAIN_DIALECT,
  programmeLimits,
  rampProgramme,
  recordScan,
  samplingTimes,
  seededRandom,
  solveStandard,
  writeScan,
} from '../study/generator/index.ts';
import { rowsOf } from './test-ports.ts';

/** Synthetic, from the independent generator: one oven of which the sheets say nothing, measured by its standards. */
const OVEN = { offsetK: 0.8, shiftS: 2.5, responseS: 0 };
/** One thermal resistance between sensor and pan for metals and glass alike, K/W (size: common practice, no source). */
const RESISTANCE = 40;
const GLASS = { massKg: 10e-6, heatCapacityJPerKgK: 500 };
const contactS = (massKg: number, heatCapacityJPerKgK: number) => RESISTANCE * massKg * heatCapacityJPerKgK;
const RATES = [2, 5, 10, 20, 40].map((rate) => rate / 60);
const ENERGY = 280e3;
const EXPONENT = 3;

function standardFile(symbol: 'In' | 'Zn', rate: number): Uint8Array {
  const metal = METALS[symbol];
  const contact = contactS(8e-6, metal.heatCapacityJPerKgK);
  const meltS = Math.sqrt((2 * metal.enthalpyJPerKg * contact) / (metal.heatCapacityJPerKgK * rate));
  const reach = rate * (8 * meltS + 12 * OVEN.shiftS) + 3;
  const programme = rampProgramme(metal.meltingK - reach, metal.meltingK + reach, rate);
  const solved = solveStandard(metal, OVEN, contact, programme, 8e-6, samplingTimes(0, programme.endS, 1500));
  const random = seededRandom(`${symbol} ${rate}`);
  const recorded = recordScan(solved, OVEN.offsetK, { noise: 0.002, drift: 0.02 }, random);
  return writeScan(recorded, { dialect: PLAIN_DIALECT, exotherm: 'up', massKg: 8e-6 });
}

function folder(): Map<string, Uint8Array> {
  const temperature = arrheniusLawWithPeak(ENERGY, 600, RATES[2]);
  const limits = programmeLimits(temperature, EXPONENT, RATES);
  const campaign = buildCampaign({
    seed: 'standards through the pipeline',
    instruments: [],
    samples: [],
    scans: RATES.map((rateKPerS, i) => ({
      file: `glass-${i}.txt`,
      sample: 'glass',
      instrument: 'oven',
      model: {
        sample: { events: [{ temperature, rate: jmakLaw(EXPONENT), enthalpyJPerKg: 45e3 }] },
        // The heat of the event crosses the same resistance: it warms the glass, and that part of the shift is the contact's.
        instrument: { ...OVEN, shiftS: OVEN.shiftS - contactS(GLASS.massKg, GLASS.heatCapacityJPerKgK) },
        selfHeating: {
          contactS: contactS(GLASS.massKg, GLASS.heatCapacityJPerKgK),
          heatCapacityJPerKgK: GLASS.heatCapacityJPerKgK,
        },
        programme: rampProgramme(limits.startK, limits.endK, rateKPerS),
        massKg: GLASS.massKg,
      },
      recording: { noise: 0.002, drift: 0.02 },
      pointsOverWidth: 80,
      exotherm: 'up' as const,
      dialect: PLAIN_DIALECT,
      sheet: { rateKPerS },
    })),
  });
  const files = new Map(campaign.files);
  files.delete('instruments.csv');
  files.delete('samples.csv');
  const rows = RATES.map((rate, i) => `glass-${i}.txt,glass,oven,sample,${rate},10,up`);
  for (const symbol of ['In', 'Zn'] as const) {
    for (const rate of RATES) {
      const file = `standards/${symbol}-${Math.round(rate * 60)}.txt`;
      files.set(file, standardFile(symbol, rate));
      rows.push(`${file},${symbol},oven,standard,${rate},8,up`);
    }
  }
  const sheet = `file,sample,instrument,role,rate [K/s],mass [mg],exotherm\n${rows.join('\n')}\n`;
  files.set('scans.csv', new TextEncoder().encode(sheet));
  return files;
}

let ports: Ports;
let campaign: string;
let dataDir: string;
const drain = () => createRunner(ports, { concurrency: 1, owner: 'test' }).drain();
const table = (name: Parameters<typeof rowsOf>[2]) => rowsOf(ports, campaign, name);

beforeAll(async () => {
  dataDir = await mkdtemp(join(tmpdir(), 'ratespan-standards-'));
  ports = await openNodePorts({ dataDir, workers: 0 });
  campaign = (await createCampaign(ports, 'standards')).id;
  for (const [path, bytes] of folder()) await receiveFile(ports, campaign, path, bytes);
  await drain();
}, 120_000);
afterAll(async () => {
  await closePorts(ports);
  await rm(dataDir, { recursive: true, force: true });
});

describe('an oven known by its standards alone', () => {
  it('is calibrated to the offset and lag that were put in', async () => {
    const [oven] = await table('instruments');
    expect(oven).toMatchObject({ instrument: 'oven', source: 'standards', standards: 10 });
    expect(Math.abs((oven.offset_K as number) - OVEN.offsetK)).toBeLessThan(0.15);
    expect(Math.abs((oven.lag_s as number) / OVEN.shiftS - 1)).toBeLessThan(0.05);
    expect(Math.abs((oven.heat_factor as number) - 1)).toBeLessThan(0.03);
    expect((await table('gaps')).map((row) => row.code)).not.toContain('no-standard');
    const [{ id }] = await listInstruments(ports, campaign);
    const { standards } = (await answerCalibration(ports, id))!;
    expect(standards.map(({ sample }) => sample).sort()).toEqual([...Array(5).fill('In'), ...Array(5).fill('Zn')]);
    // Every onset is late by offset + lag × rate, as put in.
    for (const { rateKPerS, lateK } of standards)
      expect(Math.abs(lateK - OVEN.offsetK - OVEN.shiftS * rateKPerS)).toBeLessThan(0.25);
  });

  it('gives the energy and the exponent of the sample', async () => {
    const rows = await table('parameters');
    const headline = (quantity: string, method: string) =>
      rows.find(
        (r) => r.quantity === quantity && r.method === method && r.variant === '' && r.interval === 'monte_carlo',
      )?.value as number;
    // The event warms its sample by up to 1 K: methods on T(t) as it was do not mind; Kissinger, who takes a straight ramp, reads low.
    for (const method of ['friedman', 'vyazovkin', 'jmak'])
      expect(Math.abs(headline('activation_energy', method) / (ENERGY / 1e3) - 1)).toBeLessThan(0.005);
    expect(Math.abs(headline('activation_energy', 'kissinger') / (ENERGY / 1e3) - 1)).toBeLessThan(0.03);
    expect(Math.abs(headline('avrami_exponent', 'jmak') / EXPONENT - 1)).toBeLessThan(0.01);
    const [verdict] = await table('verdicts');
    expect(verdict.verdict).not.toBe('material');
  });

  it('takes limits set by hand', async () => {
    const scan = (await listSampleScans(ports, campaign, 'glass')).find(({ file }) => file === 'glass-2.txt')!;
    const row = async () => (await table('scans')).find((r) => r.file === 'glass-2.txt')!;
    const before = await row();
    const [peakK, widthK] = [before.peak_K as number, before.width_K as number];
    await correctScan(ports, scan.id, { limitsK: [peakK - 4 * widthK, peakK + 0.4 * widthK] });
    await drain();
    expect((await row()).enthalpy_J_per_g).toBeLessThan(0.97 * (before.enthalpy_J_per_g as number));
    await correctScan(ports, scan.id, { limitsK: null });
    await drain();
    expect(await row()).toEqual(before);
  });
});
