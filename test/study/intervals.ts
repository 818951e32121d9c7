import { fitSample } from '../../jobs/kinetics/index.ts';
import { reduceScan } from '../../jobs/reduction/index.ts';
import { FIT_DRAWS } from '../../jobs/steps/settings.ts';
import type { FitScan } from '../../schema/wire/parameters.ts';
import type { InstrumentCalibration, ReadScan } from '../../schema/wire/scan.ts';
import {
  arrheniusLawWithPeak,
  jmakLaw,
  programmeLimits,
  type Random,
  rampProgramme,
  recordScan,
  type ScanSolution,
  samplingTimes,
  seededRandom,
  solveScan,
} from './generator/index.ts';
import type { StudyOptions } from './registry.ts';
import { markdownTable } from './table.ts';

/** One material for all; what varies between samples is noise, drift, each scan's placement and each instrument's lag error. */
const TRUTH = { energy: 240e3, exponent: 2.8, peakK: 640 };
const MASS_KG = 10e-6;
const ROWS = 700;

interface Oven {
  name: string;
  kind: 'furnace' | 'chip';
  ratesKPerS: number[];
  replicates: number;
  /** scatter of the temperature scale between scans, K, and errors of lag and offset that the sheet admits */
  scatterK: number;
  lagErrorS: number;
  offsetErrorK: number;
}

export interface IntervalCell {
  name: string;
  noise: number;
  ovens: Oven[];
  /** three rates without replicates are told but not held to the width limit */
  widthExempt?: true;
}

const perMinute = (...rates: number[]): number[] => rates.map((r) => r / 60);
const furnace = (ratesKPerS: number[], replicates: number, over: Partial<Oven> = {}): Oven => ({
  name: 'furnace',
  kind: 'furnace',
  ratesKPerS,
  replicates,
  scatterK: 0.2,
  lagErrorS: 0.3,
  offsetErrorK: 0.3,
  ...over,
});
const FIVE = perMinute(2, 5, 10, 20, 40);

export const INTERVAL_CELLS: readonly IntervalCell[] = [
  { name: '3 rates × 1, 0.3 %', noise: 0.003, ovens: [furnace(perMinute(2, 10, 40), 1)], widthExempt: true },
  { name: '3 rates × 2, 0.3 %', noise: 0.003, ovens: [furnace(perMinute(2, 10, 40), 2)] },
  { name: '5 rates × 1, 0.3 %', noise: 0.003, ovens: [furnace(FIVE, 1)] },
  { name: '5 rates × 2, 0.3 %', noise: 0.003, ovens: [furnace(FIVE, 2)] },
  { name: '5 rates × 2, 1 %', noise: 0.01, ovens: [furnace(FIVE, 2)] },
  { name: '5 rates × 2, 1 %, no other scatter', noise: 0.01, ovens: [furnace(FIVE, 2, { scatterK: 0 })] },
  { name: '5 rates × 2, lag error 2 s', noise: 0.003, ovens: [furnace(FIVE, 2, { lagErrorS: 2 })] },
  { name: '8 rates × 1, 0.3 %', noise: 0.003, ovens: [furnace(perMinute(1, 2, 4, 8, 15, 30, 60, 100), 1)] },
  { name: '8 rates × 2, 1 %', noise: 0.01, ovens: [furnace(perMinute(1, 2, 4, 8, 15, 30, 60, 100), 2)] },
  {
    name: 'furnace 5 × 2 (0.2 K) + chip 2 × 1 (1.5 K)',
    noise: 0.003,
    ovens: [
      furnace(FIVE, 2),
      {
        name: 'chip',
        kind: 'chip',
        ratesKPerS: [100, 1000],
        replicates: 1,
        scatterK: 1.5,
        lagErrorS: 3e-4,
        offsetErrorK: 0.5,
      },
    ],
  },
  {
    name: 'furnace 5 × 1 (0.2 K) + chip 4 × 2 (1.5 K)',
    noise: 0.003,
    ovens: [
      furnace(FIVE, 1),
      {
        name: 'chip',
        kind: 'chip',
        ratesKPerS: [50, 200, 1000, 5000],
        replicates: 2,
        scatterK: 1.5,
        lagErrorS: 1e-4,
        offsetErrorK: 0.5,
      },
    ],
  },
];

export const INTERVAL_QUANTITIES = [
  ['activation_energy', 'kissinger'],
  ['activation_energy', 'friedman'],
  ['activation_energy', 'vyazovkin'],
  ['activation_energy', 'jmak'],
  ['avrami_exponent', 'jmak'],
] as const;

/** Biases of the methods themselves, not of the interval: the truth a method aims at, kJ/mol or 1. */
function aimedAt(method: string): number {
  return method === 'avrami' ? TRUTH.exponent : TRUTH.energy / 1e3;
}

const law = arrheniusLawWithPeak(TRUTH.energy, TRUTH.peakK, 1 / 6);

/** Noise-free solution of a rate, solved once: samples differ in what is added to it. */
function solutions(cell: IntervalCell): Map<number, ScanSolution> {
  const out = new Map<number, ScanSolution>();
  for (const rate of new Set(cell.ovens.flatMap((o) => o.ratesKPerS))) {
    const { startK, endK } = programmeLimits(law, TRUTH.exponent, [rate], 4);
    const programme = rampProgramme(startK, endK, rate);
    out.set(
      rate,
      solveScan(
        {
          sample: { events: [{ temperature: law, rate: jmakLaw(TRUTH.exponent), enthalpyJPerKg: 50e3 }] },
          instrument: { offsetK: 0, shiftS: 0, responseS: 0 },
          programme,
          massKg: MASS_KG,
        },
        samplingTimes(0, programme.endS, ROWS),
      ),
    );
  }
  return out;
}

function simulateSample(cell: IntervalCell, solved: Map<number, ScanSolution>, random: Random) {
  const scans: FitScan[] = [];
  const calibrations: InstrumentCalibration[] = [];
  for (const oven of cell.ovens) {
    const calibration: InstrumentCalibration = {
      instrument: oven.name,
      kind: oven.kind,
      source: 'sheet',
      offsetK: 0,
      offsetSeK: oven.offsetErrorK,
      lagS: 0,
      lagSeS: oven.lagErrorS,
      responseS: 0,
      standards: 0,
    };
    calibrations.push(calibration);
    const lag = oven.lagErrorS * random.normal();
    const offset = oven.offsetErrorK * random.normal();
    for (const rate of oven.ratesKPerS) {
      for (let replicate = 0; replicate < oven.replicates; replicate++) {
        const name = `${oven.name}-${rate}-${replicate}`;
        const shift = offset + lag * rate + oven.scatterK * random.normal();
        const recorded = recordScan(
          solved.get(rate)!,
          shift,
          { noise: cell.noise, drift: 0.05, driftOrder: 2 },
          random.fork(name),
        );
        const scan: ReadScan = {
          timeS: recorded.timeS,
          temperatureK: recorded.temperatureK,
          heatFlow: recorded.heatFlowW,
          heatFlowUnit: 'W',
          columns: [],
          dialect: '',
          flags: [],
        };
        const outcome = reduceScan(scan, {
          file: name,
          sample: 's',
          role: 'sample',
          exotherm: 'up',
          massKg: MASS_KG,
          calibration,
        });
        const event = outcome.ok ? outcome.reduced.events[0] : undefined;
        if (event) scans.push({ file: name, sha256: name, segment: 1, instrument: oven.name, event });
      }
    }
  }
  return { scans, calibrations };
}

export interface CellResult {
  held: number[];
  /** mean half width on the scale of the estimate */
  halfWidth: number[];
  spread: number[];
  /** t(0.975, n − p) as the intervals used it is not reported by the product; the ratio is to 1.96 × spread and t × spread below */
  bias: number[];
  scanCount: number;
  samples: number;
}

export function runCell(cell: IntervalCell, count: number, draws: number, seed: string): CellResult {
  const solved = solutions(cell);
  const estimates = INTERVAL_QUANTITIES.map(() => [] as number[]);
  const halves = INTERVAL_QUANTITIES.map(() => [] as number[]);
  const held = INTERVAL_QUANTITIES.map(() => 0);
  let scanCount = 0;
  for (let s = 0; s < count; s++) {
    const random = seededRandom(`${seed}/${cell.name}/${s}`);
    const { scans, calibrations } = simulateSample(cell, solved, random);
    scanCount = scans.length;
    const fit = fitSample({ sample: 's', scans, instruments: calibrations, seed: `${seed}${s}`, draws });
    INTERVAL_QUANTITIES.forEach(([quantity, method], q) => {
      const row = fit.parameters.find(
        (p) =>
          p.quantity === quantity &&
          p.method === method &&
          p.conversion === null &&
          p.variant === '' &&
          p.interval === 'monte_carlo',
      );
      if (!row || row.lower95 === null || row.upper95 === null) return;
      const truth = aimedAt(quantity === 'avrami_exponent' ? 'avrami' : method);
      if (row.lower95 <= truth && truth <= row.upper95) held[q]++;
      estimates[q].push(row.value);
      halves[q].push((row.upper95 - row.lower95) / 2);
    });
  }
  const mean = (v: number[]) => v.reduce((a, b) => a + b, 0) / v.length;
  const sd = (v: number[]) => Math.sqrt(v.reduce((a, b) => a + (b - mean(v)) ** 2, 0) / (v.length - 1));
  return {
    held: held.map((h, q) => h / estimates[q].length),
    halfWidth: halves.map(mean),
    spread: estimates.map(sd),
    bias: estimates.map(
      (e, q) => mean(e) / aimedAt(INTERVAL_QUANTITIES[q][0] === 'avrami_exponent' ? 'avrami' : '') - 1,
    ),
    scanCount,
    samples: estimates[0].length,
  };
}

/** Coverage of the 95 % intervals and their width against the spread of the estimates. */
export function intervalsStudy({ count = 200, seed }: StudyOptions): string {
  const only = process.env.CELLS?.split(',').map(Number);
  const cells = INTERVAL_CELLS.filter((_, k) => !only || only.includes(k));
  const header = [
    'setting',
    'scans',
    ...INTERVAL_QUANTITIES.map(([q, m]) => `${q === 'avrami_exponent' ? 'n' : 'E'} ${m}`),
  ];
  const rows: (string | number)[][] = [];
  const widths: (string | number)[][] = [];
  const pooled = INTERVAL_QUANTITIES.map(() => 0);
  for (const cell of cells) {
    const r = runCell(cell, count, FIT_DRAWS, seed);
    r.held.forEach((h, q) => {
      pooled[q] += h / cells.length;
    });
    rows.push([cell.name, r.scanCount, ...r.held.map((h) => `${(100 * h).toFixed(1)} %`)]);
    widths.push([
      cell.name,
      r.scanCount,
      ...r.halfWidth.map((h, q) => `${(h / r.spread[q]).toFixed(2)} (bias ${(100 * r.bias[q]).toFixed(2)} %)`),
    ]);
  }
  rows.push(['pooled', '', ...pooled.map((h) => `${(100 * h).toFixed(1)} %`)]);
  return [
    `# Share of 95 % intervals that hold the truth, ${count} samples a setting`,
    markdownTable(header, rows),
    '# Mean half width ÷ spread of the estimates, and bias',
    markdownTable(header, widths),
  ].join('\n\n');
}
