import { CONVERSION_GRID } from '../../../schema/wire/reduced.ts';
import { GAS_CONSTANT } from '../../../schema/wire/units.ts';
import { type ArrheniusIntegral, addArrheniusIntegral } from '../../laws/arrhenius-integral.ts';
import { autocorrelationInflation, fitLinearModel } from '../../numeric/linear-model.ts';
import type { EventData } from '../event-data.ts';
import { REACTION_MODELS } from './reaction-models.ts';

/** Conversions of the parabola through the top of z(α) (a bare maximum fails at 0.5 % noise). */
const PARABOLA = { from: 0.45, to: 0.8 };

export interface MasterPlots {
  /** over the 99 grid conversions, each divided by its value at α = 0.5 */
  y: Float64Array;
  z: Float64Array;
  /** conversion at the top of z(α) and its standard error */
  peak: number;
  peakError: number;
}

/**
 * Master plots of one scan (Málek 1992, Thermochim. Acta 200:257) for any programme: y(α) = (dα/dt) e^(E/RT) ∝ f(α) and
 * z(α) = (dα/dt) e^(E/RT) ∫ e^(−E/RT) dt = f(α) g(α), the integral from the start of the programme on the measured T(t) (on a ramp it is
 * Málek's π(x) T/β).
 * @param energy J/mol, from an isoconversional method   @returns undefined without a whole curve
 */
export function masterPlots(data: EventData, scan: number, energy: number): MasterPlots | undefined {
  const p = data.programmes[scan];
  const ratePerS = data.scans[scan].event.curve?.ratePerS;
  if (!p || !ratePerS) return undefined;
  const c = energy / GAS_CONSTANT;
  const x0 = 1 / data.peakK[scan];
  const out: ArrheniusIntegral = { value: 0, byEnergy: 0, byEnergy2: 0 };
  const y = new Float64Array(CONVERSION_GRID.length);
  const z = new Float64Array(CONVERSION_GRID.length);
  for (let k = 0; k < y.length; k++) {
    const row = p.gridFrom + k;
    addArrheniusIntegral(p.timeS, p.temperatureK, k === 0 ? 0 : row - 1, row, energy, x0, out);
    y[k] = ratePerS[k] * Math.exp(c * (1 / p.temperatureK[row] - x0));
    z[k] = y[k] * out.value;
  }
  const middle = CONVERSION_GRID.findIndex((a) => Math.abs(a - 0.5) < 1e-9);
  const [y5, z5] = [y[middle], z[middle]];
  for (let k = 0; k < y.length; k++) {
    y[k] /= y5;
    z[k] /= z5;
  }
  return z.every(Number.isFinite) ? { y, z, ...topOf(z) } : undefined;
}

/** z(α) of an exact JMAK process, n (1−α)[−ln(1−α)] for every n: its top is at 1 − 1/e, where a parabola reads 0.009 lower. */
const AVRAMI_Z = Float64Array.from(CONVERSION_GRID, (a) => -(1 - a) * Math.log1p(-a));
const PARABOLA_BIAS = 1 - 1 / Math.E - parabolaTop(AVRAMI_Z).peak;

/** Top of z by the parabola, its bias on a JMAK process taken off. */
function topOf(z: Float64Array): { peak: number; peakError: number } {
  const { peak, peakError } = parabolaTop(z);
  return { peak: peak + PARABOLA_BIAS, peakError };
}

/** Where a parabola through z over 0.45 … 0.80 has its top; error from its residuals, which go together from row to row. */
function parabolaTop(z: Float64Array): { peak: number; peakError: number } {
  const rows = [...CONVERSION_GRID.keys()].filter(
    (k) => CONVERSION_GRID[k] >= PARABOLA.from - 1e-9 && CONVERSION_GRID[k] <= PARABOLA.to + 1e-9,
  );
  const centre = (PARABOLA.from + PARABOLA.to) / 2;
  const design = Float64Array.from(
    rows.flatMap((k) => [1, CONVERSION_GRID[k] - centre, (CONVERSION_GRID[k] - centre) ** 2]),
  );
  const { parameters, covariance, residuals } = fitLinearModel(
    design,
    rows.map((k) => z[k]),
    3,
  );
  const [, b, q] = parameters;
  if (!(q < 0)) return { peak: b > 0 ? 1 : 0, peakError: 0 };
  const byB = -1 / (2 * q);
  const byQ = b / (2 * q * q);
  const variance = byB * byB * covariance[4] + 2 * byB * byQ * covariance[5] + byQ * byQ * covariance[8];
  return { peak: centre - b / (2 * q), peakError: Math.sqrt(variance * autocorrelationInflation(residuals)) };
}

export interface ModelMatch {
  name: string;
  /** root mean square of y − f(α)/f(0.5) over α = 0.1 … 0.9, mean over scans */
  distance: number;
}

/** Reaction models by how near f(α)/f(0.5) comes to y(α), the nearest first. */
export function rankModels(plots: readonly MasterPlots[]): ModelMatch[] {
  const rows = [...CONVERSION_GRID.keys()].filter((k) => CONVERSION_GRID[k] > 0.0999 && CONVERSION_GRID[k] < 0.9001);
  return REACTION_MODELS.map(({ name, rate }) => {
    const theory = rows.map((k) => rate(CONVERSION_GRID[k]) / rate(0.5));
    let sum = 0;
    for (const { y } of plots) for (let i = 0; i < rows.length; i++) sum += (y[rows[i]] - theory[i]) ** 2;
    return { name, distance: Math.sqrt(sum / rows.length / plots.length) };
  }).sort((a, b) => a.distance - b.distance);
}
