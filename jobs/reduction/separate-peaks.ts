import { LeastSquares } from '../numeric/least-squares.ts';
import type { Bell, Excess } from './excess.ts';
import type { EventWindow } from './window.ts';

/**
 * Overlapping events by a sum of Fraser–Suzuki peaks (Fraser & Suzuki 1969, Anal. Chem. 41:37; Perejón et al. 2011, J. Phys. Chem. B
 * 115:1780): y = h exp(−ln 2/s² · ln²(1 + 2 s (t − p)/ω)), 0 where the bracket is not positive; s < 0 leans to later times. Bounds: s in
 * ASYMMETRY, p between its neighbours' starts, h and ω positive; kept by fitting ln h, ln ω and the arc tangent of s.
 */
export interface SeparatedPeak {
  height: number;
  peakS: number;
  /** full width at half maximum of the symmetric case, s */
  omegaS: number;
  asymmetry: number;
}

const ASYMMETRY = { middle: -0.2, reach: 0.45 };
/** A JMAK event on a ramp has s = −0.39; several peaks are held near it by this weight, so that a shoulder does not take any shape it likes. */
const JMAK_TURN = Math.tan(((-0.39 - ASYMMETRY.middle) / ASYMMETRY.reach) * (Math.PI / 2));
const HELD_WITH_OTHERS = 0.6;
const PER_PEAK = 4;
/** Bins used in the fit: more only costs time. */
const MOST_ROWS = { one: 120, several: 400 };

export interface Separation {
  peaks: SeparatedPeak[];
  /** root mean square residual, signal units */
  residual: number;
}

/** @param start rough bells in order of time */
export function separatePeaks(w: EventWindow, x: Excess, start: Bell[]): Separation | undefined {
  const stride = Math.max(1, Math.ceil((x.to - x.from) / (start.length > 1 ? MOST_ROWS.several : MOST_ROWS.one)));
  const rows: number[] = [];
  for (let i = x.from; i < x.to; i += stride) rows.push(i);
  const p = PER_PEAK * start.length;
  if (rows.length <= p) return undefined;
  const scaleY = Math.max(...start.map((b) => b.height));
  const origin = start[0].peakS;
  const unit = Math.min(...start.map((b) => b.leftS + b.rightS));
  const parameters = new Float64Array(p);
  start.forEach((b, k) => {
    parameters.set(
      [Math.log(b.height / scaleY), (b.peakS - origin) / unit, Math.log((b.leftS + b.rightS) / unit), JMAK_TURN],
      k * PER_PEAK,
    );
  });
  const fit = new LeastSquares(rows.length + start.length, p, (q, residuals, jacobian) => {
    for (let r = 0; r < rows.length; r++) {
      const t = (w.t[rows[r]] - origin) / unit;
      residuals[r] = -x.e[rows[r]] / scaleY;
      for (let k = 0; k < start.length; k++) {
        const at = k * PER_PEAK;
        const h = Math.exp(q[at]);
        const omega = Math.exp(q[at + 2]);
        const turn = q[at + 3];
        const s = asymmetryOf(turn);
        const z = 1 + (2 * s * (t - q[at + 1])) / omega;
        const row = r * p + at;
        if (z <= 1e-9) {
          jacobian.fill(0, row, row + PER_PEAK);
          continue;
        }
        const l = Math.log(z);
        const y = h * Math.exp((-Math.LN2 * l * l) / (s * s));
        const byL = (-2 * Math.LN2 * l * y) / (s * s);
        residuals[r] += y;
        jacobian[row] = y;
        jacobian[row + 1] = (byL / z) * ((-2 * s) / omega);
        jacobian[row + 2] = (byL / z) * ((-2 * s * (t - q[at + 1])) / omega);
        const byS = (2 * Math.LN2 * l * l * y) / s ** 3 + (byL / z) * ((2 * (t - q[at + 1])) / omega);
        jacobian[row + 3] = byS * (ASYMMETRY.reach / (1 + turn * turn)) * (2 / Math.PI);
      }
    }
    for (let k = 0; k < start.length; k++) {
      const row = rows.length + k;
      const heldBy = start.length > 1 ? HELD_WITH_OTHERS : 0;
      residuals[row] = heldBy * (q[k * PER_PEAK + 3] - JMAK_TURN);
      jacobian.fill(0, row * p, (row + 1) * p);
      jacobian[row * p + k * PER_PEAK + 3] = heldBy;
    }
  });
  const scale = new Float64Array(p).fill(1);
  const found = fit.solve(parameters, scale, 60, 1e-5);
  const q = found.parameters;
  if (!q.every(Number.isFinite)) return undefined;
  const peaks = start.map((_, k) => ({
    height: scaleY * Math.exp(q[k * PER_PEAK]),
    peakS: origin + unit * q[k * PER_PEAK + 1],
    omegaS: unit * Math.exp(q[k * PER_PEAK + 2]),
    asymmetry: asymmetryOf(q[k * PER_PEAK + 3]),
  }));
  return { peaks, residual: scaleY * Math.sqrt(found.sumOfSquares / rows.length) };
}

/** The pole at s = 0 (a Gaussian) is stepped over: 1e-4 differs from it by less than rounding of the data. */
function asymmetryOf(turn: number): number {
  const s = ASYMMETRY.middle + ASYMMETRY.reach * (2 / Math.PI) * Math.atan(turn);
  return Math.abs(s) < 1e-4 ? 1e-4 : s;
}

export function peakValue({ height, peakS, omegaS, asymmetry: s }: SeparatedPeak, t: number): number {
  const z = 1 + (2 * s * (t - peakS)) / omegaS;
  if (z <= 1e-9) return 0;
  const l = Math.log(z);
  return height * Math.exp((-Math.LN2 * l * l) / (s * s));
}

/** Half widths in closed form: ln z = ± s at half height. */
export function bellOf({ height, peakS, omegaS, asymmetry: s }: SeparatedPeak): Bell {
  const sides = [(omegaS * -Math.expm1(-s)) / (2 * s), (omegaS * Math.expm1(s)) / (2 * s)];
  return { height, peakS, leftS: sides[0], rightS: sides[1] };
}

/**
 * The measured excess divided among the peaks in proportion to their fitted heights at each time: what the fitted shapes miss stays with
 * the event it lies under.
 */
export function partExcess(w: EventWindow, x: Excess, peaks: SeparatedPeak[]): Excess[] {
  return peaks.map((own, k) => {
    const share = new Float64Array(w.t.length);
    const e = new Float64Array(w.t.length);
    const cumulative = new Float64Array(w.t.length);
    for (let i = x.from; i < x.to; i++) {
      let total = 0;
      for (const peak of peaks) total += peakValue(peak, w.t[i]);
      const value = peakValue(own, w.t[i]);
      // Outside every fitted peak the nearest one takes the rest.
      const nearest = w.t[i] < own.peakS ? k === 0 : k === peaks.length - 1;
      share[i] = total > 1e-6 * own.height ? value / total : nearest ? 1 : 0;
      e[i] = share[i] * x.e[i];
    }
    let sum = k === 0 ? x.cumulative[x.from] : 0;
    cumulative[x.from] = sum;
    for (let i = x.from + 1; i < x.to; i++) {
      sum += 0.5 * (e[i] + e[i - 1]) * (w.t[i] - w.t[i - 1]);
      cumulative[i] = sum;
    }
    cumulative.fill(sum, x.to);
    return { ...x, e, cumulative, area: sum, share };
  });
}
