import type { Random } from './random.ts';
import type { ScanSolution } from './scan-model.ts';

/** What the electronics add. Fractions are of the height of the events' share of the recorded signal. */
export interface RecordingSettings {
  /** One standard deviation of white noise */
  noise: number;
  /** The same for noise with a 1/f spectrum */
  pinkNoise?: number;
  /** Peak to peak of a curved drift over the whole scan */
  drift: number;
  /** Highest power of the drift: a parabola bends one way, a cubic by default turns back. */
  driftOrder?: 2 | 3;
  /** Constant level */
  level?: number;
  /** The signal sits at this level (fraction above the lowest value) instead of passing it. */
  clipAbove?: number;
  /** Single-point spikes: how many and how high */
  spikes?: { count: number; height: number };
  /** Jumps of the level, up or down: how many and how high at most */
  jumps?: { count: number; height: number };
  /** The instrument settles at the start, exponentially: from how high, and within which part of the scan */
  settling?: { height: number; part: number };
}

/** One recorded scan: reported temperature and heat flow, exotherm up. */
export interface RecordedScan {
  timeS: Float64Array;
  temperatureK: Float64Array;
  heatFlowW: Float64Array;
}

/**
 * Noise, drift, clipping and spikes on a noise-free solution.
 * @param heightW what the fractions refer to; by default the events' height in this scan
 */
export function recordScan(
  solution: ScanSolution,
  offsetK: number,
  settings: RecordingSettings,
  random: Random,
  heightW = maximumOf(solution.eventW),
): RecordedScan {
  const { timeS, programmeK, signalW } = solution;
  const count = timeS.length;
  const white = random.fork('white');
  const pink = settings.pinkNoise ? pinkNoise(count, random.fork('pink')) : undefined;
  const drift = curvedDrift(timeS, random.fork('drift'), settings.driftOrder);
  const heatFlowW = new Float64Array(count);
  for (let k = 0; k < count; k++) {
    const extra =
      settings.noise * white.normal() +
      (settings.pinkNoise ?? 0) * (pink?.[k] ?? 0) +
      settings.drift * drift[k] +
      (settings.level ?? 0);
    heatFlowW[k] = signalW[k] + heightW * extra;
  }
  const where = random.fork('spikes');
  for (let s = 0; s < (settings.spikes?.count ?? 0); s++)
    heatFlowW[where.integer(count)] += heightW * settings.spikes!.height * (where.uniform() < 0.5 ? -1 : 1);
  const leaps = random.fork('jumps');
  for (let s = 0; s < (settings.jumps?.count ?? 0); s++) {
    const leap = heightW * settings.jumps!.height * leaps.between(-1, 1);
    for (let k = leaps.integer(count); k < count; k++) heatFlowW[k] += leap;
  }
  if (settings.settling) {
    const { height, part } = settings.settling;
    for (let k = 0; k < count; k++) heatFlowW[k] += heightW * height * Math.exp(-k / (part * count));
  }
  if (settings.clipAbove !== undefined) {
    const limit = minimumOf(heatFlowW) + settings.clipAbove * heightW;
    for (let k = 0; k < count; k++) heatFlowW[k] = Math.min(heatFlowW[k], limit);
  }
  return { timeS, temperatureK: programmeK.map((value) => value + offsetK), heatFlowW };
}

/** Random mixture of the first three Legendre polynomials over the scan, the third at half weight; peak to peak 1. */
export function curvedDrift(timeS: Float64Array, random: Random, order: 2 | 3 = 3): Float64Array {
  const [linear, square, cubic] = [random.normal(), random.normal(), order === 3 ? random.normal() / 2 : 0];
  const [first, last] = [timeS[0], timeS[timeS.length - 1]];
  const out = timeS.map((t) => {
    const s = (2 * (t - first)) / (last - first) - 1;
    return linear * s + square * (1.5 * s * s - 0.5) + cubic * (2.5 * s ** 3 - 1.5 * s);
  });
  const span = maximumOf(out) - minimumOf(out);
  return out.map((value) => value / span);
}

/** Noise whose power falls as 1/f: octaves of held normal deviates (Voss, in Gardner 1978), unit variance. */
export function pinkNoise(count: number, random: Random): Float64Array {
  const octaves = Math.max(1, Math.ceil(Math.log2(count)));
  const held = Array.from({ length: octaves }, () => random.normal());
  const out = new Float64Array(count);
  for (let k = 0; k < count; k++) {
    for (let o = 0; o < octaves; o++) if (k % 2 ** o === 0) held[o] = random.normal();
    let sum = 0;
    for (let o = 0; o < octaves; o++) sum += held[o];
    out[k] = sum / Math.sqrt(octaves);
  }
  return out;
}

/** Sampling instants from `fromS` to `toS`: even, or each moved by up to `jitter` of a step and a share of them lost. */
export function samplingTimes(
  fromS: number,
  toS: number,
  count: number,
  uneven?: { jitter: number; lost: number; random: Random },
): Float64Array {
  const step = (toS - fromS) / (count - 1);
  const even = Float64Array.from({ length: count }, (_, k) => (k === count - 1 ? toS : fromS + k * step));
  if (!uneven) return even;
  const { jitter, lost, random } = uneven;
  if (!(jitter >= 0 && jitter < 0.5)) throw new RangeError(`jitter must be in [0, 0.5) of a step: ${jitter}`);
  return even
    .map((t, k) => (k === 0 || k === count - 1 ? t : t + step * jitter * random.between(-1, 1)))
    .filter((_, k) => k === 0 || k === count - 1 || random.uniform() >= lost);
}

const maximumOf = (column: Float64Array): number => column.reduce((a, b) => Math.max(a, b), -Infinity);
const minimumOf = (column: Float64Array): number => column.reduce((a, b) => Math.min(a, b), Infinity);
