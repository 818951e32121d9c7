import type { FlagCode } from '../../schema/wire/flags.ts';
import { GAS_CONSTANT, kelvinPerSecond } from '../../schema/wire/units.ts';
import { createRandom, type Random } from '../numeric/random.ts';
import { demoGoals, type GoalTruth, SEASONS_PATH, writeGoalSheet, writeSeasons } from './demo-goals.ts';
import { CHIP_NORTH, type DemoInstrument, FURNACE_EAST, FURNACE_WEST } from './demo-instruments.ts';
import { DEMO_EXCIPIENT, DEMO_FILM, DEMO_MATERIALS, DEMO_RIBBON, type DemoMaterial } from './demo-materials.ts';
import { type DemoScanRow, writeInstrumentsSheet, writeSamplesSheet, writeScansSheet } from './demo-sheets.ts';
import { linearRamp } from './programme.ts';
import { lnRateConstant, localEnergy } from './rate-law.ts';
import { simulateScan } from './scan.ts';
import { writeScanText } from './scan-text.ts';

/** What was put in, to be held against what comes out. */
export interface SampleTruth {
  sample: string;
  description: string;
  avramiExponent: number;
  enthalpyJPerG: number;
  scanCount: number;
  /** kJ/mol; undefined for the bent law, whose energy is local */
  energyKJPerMol?: number;
  /** E_loc at the peak of the slowest and the fastest scan and between */
  localEnergies: { temperatureK: number; energyKJPerMol: number }[];
}

/** A fault put in on purpose, and the flag that must come of it. */
export interface PlantedFlaw {
  code: FlagCode;
  sample: string;
  file?: string;
  sentence: string;
}

export interface DemoCampaign {
  /** Sheets first. Paths as in a campaign folder. */
  files: { path: string; bytes: Uint8Array }[];
  truth: SampleTruth[];
  flaws: PlantedFlaw[];
  /** Questions of its goal.csv */
  goals: GoalTruth[];
}

interface DemoScan {
  material: DemoMaterial;
  instrument: DemoInstrument;
  nominalKPerS: number;
  replicate: string;
  /** True rate as a fraction of the nominal one, for the scan whose sheet row is wrong */
  rateFactor?: number;
  damaged?: true;
  noSign?: true;
}

/** Ramps start at this fraction of the expected peak, low enough for Augis–Bennett (at most 0.75). */
const START_FRACTION = 0.73;

const SEED = 'ratespan demo campaign 1';

const atRates = (
  material: DemoMaterial,
  instrument: DemoInstrument,
  ratesKPerS: readonly number[],
  replicate: string,
): DemoScan[] => ratesKPerS.map((nominalKPerS) => ({ material, instrument, nominalKPerS, replicate }));

const perMinute = (...rates: number[]): number[] => rates.map(kelvinPerSecond);

/** The plan of the campaign with its planted flaws: a missing decade, a wrong nominal rate, a scan without a sign, a damaged file. */
function planScans(): DemoScan[] {
  return [
    ...atRates(DEMO_FILM, FURNACE_WEST, perMinute(2, 5, 10, 20, 40, 100), 'a'),
    ...atRates(DEMO_FILM, FURNACE_WEST, perMinute(5, 40), 'b'),
    // Nothing between 100 and 1000 K/s: the missing decade.
    ...atRates(DEMO_FILM, CHIP_NORTH, [20, 60, 2000, 7000, 30_000], 'a'),
    ...atRates(DEMO_FILM, CHIP_NORTH, [60, 2000, 30_000], 'b'),
    ...atRates(DEMO_RIBBON, FURNACE_EAST, perMinute(2, 5, 10, 20, 40), 'a'),
    ...atRates(DEMO_RIBBON, FURNACE_EAST, perMinute(2, 10, 40), 'b'),
    { ...atRates(DEMO_RIBBON, FURNACE_EAST, perMinute(20), 'b')[0], rateFactor: 0.92 },
    ...atRates(DEMO_RIBBON, FURNACE_WEST, perMinute(5, 20), 'a'),
    { ...atRates(DEMO_RIBBON, FURNACE_WEST, perMinute(10), 'a')[0], noSign: true },
    ...atRates(DEMO_EXCIPIENT, FURNACE_EAST, perMinute(2, 5, 10, 20, 40), 'a'),
    ...atRates(DEMO_EXCIPIENT, FURNACE_EAST, perMinute(2, 5, 20, 40), 'b'),
    { ...atRates(DEMO_EXCIPIENT, FURNACE_EAST, perMinute(10), 'b')[0], damaged: true },
    ...atRates(DEMO_EXCIPIENT, FURNACE_WEST, perMinute(5, 20), 'a'),
  ];
}

/** Files, truth, questions and planted flaws of the demo. The same on every call. */
export function buildDemoCampaign(): DemoCampaign {
  const random = createRandom(SEED);
  const rows: DemoScanRow[] = [];
  const data: DemoCampaign['files'] = [];
  const flaws: PlantedFlaw[] = [
    {
      code: 'decade-gap',
      sample: DEMO_FILM.sample,
      sentence: 'no scan between 100 and 1000 K/s',
    },
    {
      code: 'instruments-not-bridged',
      sample: DEMO_FILM.sample,
      sentence: 'furnace and chip share no heating rate',
    },
  ];
  const peaks = new Map<string, { count: number; peaksK: number[] }>();
  for (const scan of planScans()) {
    const path = scanPath(scan);
    const made = makeScan(scan, random);
    rows.push({ ...made.row, file: path });
    data.push({ path, bytes: made.bytes });
    flaws.push(...flawsOf(scan, path));
    const seen = peaks.get(scan.material.sample) ?? { count: 0, peaksK: [] };
    if (!scan.damaged) {
      seen.count++;
      seen.peaksK.push(made.peakK);
    }
    peaks.set(scan.material.sample, seen);
  }
  const goals = demoGoals();
  const encode = (text: string): Uint8Array => new TextEncoder().encode(text);
  return {
    files: [
      { path: 'scans.csv', bytes: encode(writeScansSheet(rows)) },
      { path: 'instruments.csv', bytes: encode(writeInstrumentsSheet()) },
      { path: 'samples.csv', bytes: encode(writeSamplesSheet()) },
      { path: 'goal.csv', bytes: encode(writeGoalSheet(goals)) },
      { path: SEASONS_PATH, bytes: encode(writeSeasons()) },
      ...data,
    ],
    truth: DEMO_MATERIALS.map((material) => truthOf(material, peaks.get(material.sample)!)),
    flaws,
    goals,
  };
}

function scanPath({ material, instrument, nominalKPerS, replicate }: DemoScan): string {
  const perS = instrument.kind === 'chip';
  const rate = Number((perS ? nominalKPerS : nominalKPerS * 60).toPrecision(6));
  return `${material.sample}/${instrument.instrument}/heating-${rate}-K-per-${perS ? 's' : 'min'}-${replicate}.txt`;
}

function flawsOf(scan: DemoScan, file: string): PlantedFlaw[] {
  const { sample } = scan.material;
  const flaws: PlantedFlaw[] = [];
  if (scan.rateFactor) {
    const percent = Math.round((1 - scan.rateFactor) * 100);
    flaws.push({
      code: 'rate-off-nominal',
      sample,
      file,
      sentence: `sheet rate is wrong: true rate ${percent} % lower`,
    });
  }
  if (scan.noSign) {
    flaws.push({ code: 'sign-inferred', sample, file, sentence: 'exotherm direction stated nowhere' });
  }
  if (scan.damaged) flaws.push({ code: 'file-damaged', sample, file, sentence: 'file breaks off after a few rows' });
  return flaws;
}

/** Rows that are left of the damaged file: the header and the first few, the last one cut in its middle. */
const ROWS_BEFORE_BREAK = 7;

function makeScan(
  scan: DemoScan,
  random: Random,
): { bytes: Uint8Array; row: Omit<DemoScanRow, 'file'>; peakK: number } {
  const { material, instrument, nominalKPerS } = scan;
  // Programmed rates are met to about 0.2 %, as instruments do.
  const rate = nominalKPerS * (scan.rateFactor ?? 1) * (1 + 0.002 * random.normal());
  const massKg = instrument.massKg * (0.85 + 0.3 * random.uniform());
  const expectedK = expectPeak(material, rate);
  const simulated = simulateScan(
    material,
    massKg,
    {
      ...instrument,
      offsetK: instrument.offsetK + instrument.mountScatterK * random.normal(),
      drift: { linear: 0.05 * (2 * random.uniform() - 1), quadratic: 0.05 * (0.4 + 0.6 * random.uniform()) },
      stepS: Math.max(instrument.stepK / rate, instrument.shortestStepS),
    },
    linearRamp(START_FRACTION * expectedK, expectedK + material.abovePeakK, rate),
    random,
  );
  const text = writeScanText({ ...simulated, massKg }, { ...instrument.dialect, preamble: instrument.preamble });
  const top = simulated.ratePerS.indexOf(simulated.ratePerS.reduce((a, b) => Math.max(a, b), 0));
  return {
    bytes: scan.damaged ? breakOff(text) : text,
    row: {
      sample: material.sample,
      instrument: instrument.instrument,
      rateKPerS: nominalKPerS,
      massKg: instrument.kind === 'chip' ? undefined : massKg,
      exotherm: scan.noSign || instrument.directionInFile ? undefined : instrument.exotherm,
      replicate: scan.replicate,
    },
    peakK: simulated.sampleK[top],
  };
}

/** The first bytes of a file in a one-byte encoding, ended inside a number as a broken transfer would. */
function breakOff(bytes: Uint8Array): Uint8Array {
  let lines = 0;
  const end = bytes.findIndex((byte) => byte === 0x0a && ++lines === ROWS_BEFORE_BREAK + 5);
  return bytes.slice(0, end - 5);
}

/** Temperature of the peak by the peak condition ln β = ln K + ln(R T²/E), by bisection, K. */
function expectPeak(material: DemoMaterial, rateKPerS: number): number {
  let [low, high] = [250, 1500];
  for (let i = 0; i < 60; i++) {
    const t = (low + high) / 2;
    const lnRate = lnRateConstant(material.law, t) + Math.log((GAS_CONSTANT * t * t) / localEnergy(material.law, t));
    if (lnRate < Math.log(rateKPerS)) low = t;
    else high = t;
  }
  return (low + high) / 2;
}

function truthOf(material: DemoMaterial, seen: { count: number; peaksK: number[] }): SampleTruth {
  const low = Math.min(...seen.peaksK);
  const high = Math.max(...seen.peaksK);
  const middle = 2 / (1 / low + 1 / high);
  const { law } = material;
  return {
    sample: material.sample,
    description: material.description,
    avramiExponent: material.avramiExponent,
    enthalpyJPerG: material.enthalpyJPerKg / 1000,
    scanCount: seen.count,
    energyKJPerMol: law.kind === 'arrhenius' ? law.energyJPerMol / 1000 : undefined,
    localEnergies: [low, middle, high].map((temperatureK) => ({
      temperatureK,
      energyKJPerMol: localEnergy(law, temperatureK) / 1000,
    })),
  };
}
