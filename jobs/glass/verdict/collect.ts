import type { FitScan } from '../../../schema/wire/parameters.ts';
import { CONVERSION_GRID } from '../../../schema/wire/reduced.ts';
import type { InstrumentCalibration } from '../../../schema/wire/scan.ts';
import { GAS_CONSTANT } from '../../../schema/wire/units.ts';
import { bentScale } from '../../laws/bend.ts';
import { fitLine } from '../../numeric/line.ts';
import { median } from '../../numeric/statistics.ts';
import { type Characteristic, Condition } from './condition.ts';
import type { LawData } from './law-fit.ts';

/** One event over all instruments, as the verdict sees it: only scans that may be judged on. */
export interface JudgedEvent {
  event: number;
  scans: FitScan[];
  instruments: InstrumentCalibration[];
  /** all scans have a curve, so the time centroid is known */
  hasCentroid: boolean;
  exponent: number;
  widths: Float64Array;
}

/** Error of a temperature from its event's shape (limits, baseline, a law that is not quite JMAK), as a part of the width. */
const SHAPE_PART = 0.003;
/** The same where melting or the glass transition cut the event short. */
const OVERLAP_PART = 0.03;
const LEAST_ERROR_K = 0.02;
/** FWHM n E/(R T²) of a JMAK event in the limit of large E/(R T) (exact value) */
const WIDTH_FACTOR = 2.446;
const HALF = CONVERSION_GRID.indexOf(0.5);

/** Scans of one event in a fixed order (rate, then hash), with the instruments they name. */
export function collectJudged(event: number, scans: FitScan[], calibrations: InstrumentCalibration[]): JudgedEvent {
  const sorted = [...scans].sort(
    (a, b) => a.event.rateKPerS - b.event.rateKPerS || (a.sha256 < b.sha256 ? -1 : 1) || a.segment - b.segment,
  );
  // The slowest instrument comes first: it is the one whose state of the material the law describes.
  const names = [...new Set(sorted.map((s) => s.instrument))];
  const instruments = names.map((name) => {
    const found = calibrations.find((c) => c.instrument === name);
    if (!found) throw new RangeError(`no calibration for instrument ${name} of sample scans of event ${event}`);
    return found;
  });
  const widths = Float64Array.from(sorted, (s) => s.event.widthK);
  return {
    event,
    scans: sorted,
    instruments,
    hasCentroid: sorted.every((s) => s.event.curve !== undefined && Number.isFinite(s.event.centroidK)),
    exponent: exponentFromWidths(sorted),
    widths,
  };
}

/** Median of n = 2.446 R T²/(E FWHM) with the local E of neighbouring rates left to one line: only small corrections rest on it. */
function exponentFromWidths(scans: FitScan[]): number {
  const slope = fitLine(
    scans.map((s) => Math.log(s.event.rateKPerS)),
    scans.map((s) => Math.log(s.event.peakK)),
  ).slope;
  // d ln T/d ln β = g/T to first order, g = R T²/E; the local value is better where rates span decades, so it is scaled by the widths' trend.
  const values = scans
    .filter((s) => s.event.widthK > 0)
    .map((s) => (WIDTH_FACTOR * slope * s.event.peakK) / s.event.widthK);
  return Math.min(6, Math.max(0.7, median(values) || 3));
}

/** The fit's data for one kind of characteristic temperature, and each temperature's own error, K. */
export function lawData(judged: JudgedEvent, what: Characteristic): { data: LawData; own: Float64Array } {
  const { scans, instruments, exponent } = judged;
  const temperatureK = Float64Array.from(scans, ({ event: e }) => {
    if (what === 'peak') return e.peakK;
    return what === 'centroid' ? e.centroidK : (e.curve?.temperatureK[HALF] ?? Number.NaN);
  });
  const instrument = Uint16Array.from(scans, (s) => instruments.findIndex((c) => c.instrument === s.instrument));
  const rate = Float64Array.from(scans, (s) => s.event.rateKPerS);
  const data: LawData = {
    n: scans.length,
    rate,
    temperatureK,
    variance: new Float64Array(scans.length).fill(1),
    instrument,
    instruments: instruments.length,
    offsetSeK: Float64Array.from(instruments, (c) => Math.max(LEAST_ERROR_K, c.offsetSeK)),
    lagSeS: Float64Array.from(instruments, (c) => (c.source === 'prior' ? 0 : c.lagSeS)),
    topRate: Float64Array.from(instruments, (_, j) => Math.max(...rate.filter((_r, i) => instrument[i] === j))),
    scale: bentScale(temperatureK.map((T) => 1 / T)),
    condition: new Condition(what, exponent),
  };
  const own = Float64Array.from(scans, ({ event: e }) => {
    const overlapped = e.usableTo < 0.95 || e.usableFrom > 0.05;
    return Math.hypot(e.peakErrorK, (overlapped ? OVERLAP_PART : SHAPE_PART) * e.widthK, LEAST_ERROR_K);
  });
  return { data, own };
}

/** n from one scan's curve under a rate law: slope of ln[−ln(1−α)] against ln X(T). @param lnX ln ∫K dt at T, K */
export function exponentOfCurve(scan: FitScan, lnX: (temperatureK: number) => number): number | undefined {
  const { curve, usableFrom, usableTo } = scan.event;
  if (!curve) return undefined;
  const x: number[] = [];
  const y: number[] = [];
  for (let k = 4; k <= 94; k += 5) {
    const alpha = CONVERSION_GRID[k];
    if (alpha < usableFrom || alpha > usableTo) continue;
    x.push(lnX(curve.temperatureK[k]));
    y.push(Math.log(-Math.log1p(-alpha)));
  }
  if (x.length < 5 || !x.every(Number.isFinite)) return undefined;
  return fitLine(x, y).slope;
}

export const exponentOfWidth = (widthK: number, temperatureK: number, energyJPerMol: number): number =>
  (WIDTH_FACTOR * GAS_CONSTANT * temperatureK ** 2) / (energyJPerMol * widthK);
