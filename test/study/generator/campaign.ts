import { type Dialect, drawDialects } from './dialects.ts';
import { type EventTruth, eventTruths } from './event-truth.ts';
import { seededRandom } from './random.ts';
import { type RecordingSettings, recordScan, samplingTimes } from './recording.ts';
import type { ScanModel } from './scan-model.ts';
import {
  type SheetInstrument,
  type SheetSample,
  type SheetScan,
  writeInstrumentsSheet,
  writeSamplesSheet,
  writeScansSheet,
} from './sheets.ts';
import { solveScan } from './solve-scan.ts';
import { type WriteSettings, writeScan } from './write-scan.ts';

export interface ScanPlan {
  /** Path in the folder */
  file: string;
  sample: string;
  instrument: string;
  model: ScanModel;
  recording: RecordingSettings;
  /** Rows over the full width at half maximum of the sharpest event */
  pointsOverWidth: number;
  /** Each instant moved by up to this share of a step, and this share of rows lost */
  uneven?: { jitter: number; lost: number };
  dialect?: Dialect;
  exotherm: 'up' | 'down';
  headerWords?: boolean;
  flaws?: WriteSettings['flaws'];
  sensitivityVPerW?: number;
  /** What the sheet says of this scan beyond file, sample and instrument; `undefined` takes a value out. */
  sheet: Partial<SheetScan>;
}

export interface CampaignPlan {
  seed: string;
  scans: ScanPlan[];
  instruments: SheetInstrument[];
  samples: SheetSample[];
}

export interface Campaign {
  /** Path → bytes, sheets at the root */
  files: Map<string, Uint8Array>;
  /** By path of the scan */
  truth: Map<string, EventTruth[]>;
}

/** Fewest and most rows of a file: a sharp event in a wide range must not make files of 10⁶ rows. */
const ROWS = { least: 60, most: 60_000 };

/** A whole campaign folder in memory, with the truth beside it. The same plan gives the same bytes. */
export function buildCampaign(plan: CampaignPlan): Campaign {
  const random = seededRandom(plan.seed);
  const dialects = drawDialects(plan.scans.length, random.fork('dialects'));
  const files = new Map<string, Uint8Array>();
  const truth = new Map<string, EventTruth[]>();
  plan.scans.forEach((scan, index) => {
    const own = random.fork(`scan ${scan.file}`);
    const truths = eventTruths(scan.model);
    truth.set(scan.file, truths);
    const { endS } = scan.model.programme;
    const stepS = Math.min(...truths.map((event) => event.widthS)) / scan.pointsOverWidth;
    const rows = Math.min(ROWS.most, Math.max(ROWS.least, Math.round(endS / stepS) + 1));
    const uneven = scan.uneven && { ...scan.uneven, random: own.fork('sampling') };
    const solution = solveScan(scan.model, samplingTimes(0, endS, rows, uneven));
    const recorded = recordScan(solution, scan.model.instrument.offsetK, scan.recording, own);
    files.set(
      scan.file,
      writeScan(recorded, {
        dialect: scan.dialect ?? dialects[index],
        exotherm: scan.exotherm,
        headerWords: scan.headerWords,
        massKg: scan.model.massKg,
        sensitivityVPerW: scan.sensitivityVPerW,
        flaws: scan.flaws,
      }),
    );
  });
  const rows = plan.scans.map(({ file, sample, instrument, model, exotherm, sheet }) => ({
    file,
    sample,
    instrument,
    role: 'sample' as const,
    massKg: model.massKg,
    exotherm,
    ...sheet,
  }));
  files.set('scans.csv', writeScansSheet(rows));
  files.set('instruments.csv', writeInstrumentsSheet(plan.instruments));
  if (plan.samples.length > 0) files.set('samples.csv', writeSamplesSheet(plan.samples));
  return { files, truth };
}
