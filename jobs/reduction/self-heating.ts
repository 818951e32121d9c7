import { CONVERSION_GRID, type ReducedCurve } from '../../schema/wire/reduced.ts';
import { interpolate } from '../numeric/local-polynomial.ts';
import { type EventShape, trueSignal } from './conversion.ts';
import type { Excess } from './excess.ts';
import type { ScanContext } from './scan-context.ts';
import type { EventWindow } from './window.ts';

/** J/(kg K), where the sheet gives none. */
const ASSUMED_HEAT_CAPACITY = 500;
/** Grid rows between which ln(−ln(1 − α)) of a JMAK event is straight in T: α = 0.2 and 0.7. */
const [LOW, HIGH] = [19, 69];
const TYPICAL_EXPONENT = 3;

/** A standard's resistance holds for its own contact: for another sample it may be this part off. */
export const WARMING_ERROR_PART = 0.3;

export interface SelfHeating {
  /** Self-heating number */
  number: number;
  /** True when S is only known to lie below, the sample's part of the lag being taken as all of it */
  bound: boolean;
  heatCapacityAssumed: boolean;
}

/**
 * S = τ_s (ΔH/c_p) (dα/dt)_max E/(R T²): how much the event's own warmth speeds it up. Where the instrument's thermal
 * resistance R_th is known (leading edge of a standard, slope β/R_th), τ_s = R_th m c_p and S = R_th φ_max E/(R T²): mass and heat
 * capacity drop out. Otherwise τ_s ≤ τ − τ_r bounds it from above. A single scan shows n E/(R T²) (the growth of ln(−ln(1−α)) a kelvin)
 * but not its two factors: n is taken as 3, so that S is right to a factor of two, as a warning should be.
 * @param warmedK what the event warms the sample by at most   @param enthalpyJPerKg where known
 */
export function selfHeatingOf(
  { input, scan }: ScanContext,
  curve: ReducedCurve,
  warmedK: number,
  enthalpyJPerKg: number | undefined,
): SelfHeating | undefined {
  const { resistanceKPerW, lagS, responseS } = input.calibration;
  const y = (k: number) => Math.log(-Math.log1p(-CONVERSION_GRID[k]));
  const steepness = (y(HIGH) - y(LOW)) / (curve.temperatureK[HIGH] - curve.temperatureK[LOW]) / TYPICAL_EXPONENT;
  if (resistanceKPerW !== undefined && scan.heatFlowUnit !== 'W/kg') {
    return { number: warmedK * steepness, bound: false, heatCapacityAssumed: false };
  }
  const contactS = lagS - Math.max(0, responseS ?? 0);
  if (enthalpyJPerKg === undefined || !(contactS > 0)) return undefined;
  const rise = enthalpyJPerKg / (input.heatCapacityJPerKgK ?? ASSUMED_HEAT_CAPACITY);
  return {
    number: contactS * rise * Math.max(...curve.ratePerS) * steepness,
    bound: true,
    heatCapacityAssumed: input.heatCapacityJPerKgK === undefined,
  };
}

/** What an event warms its sample by, K; all 0 where the thermal resistance is not known. */
export interface Warming {
  at: (t: number) => number;
  /** over the event, weighted by its heat flow */
  mean: number;
  most: number;
  /** standard error, part of it */
  part: number;
}

/**
 * The sample is warmer than its programme says by R_th times the heat that flows through its contact. What an event gives off reaches the
 * contact with the delay R_th m c_p: where that is known the heat set free is delayed by it again, else the signal counts as it is.
 * At the top the warming is stationary as long as it is small, so that Kissinger's condition holds there with the programme's rate.
 */
export function warmingOf(
  { input, scan, contactS }: ScanContext,
  w: EventWindow,
  x: Excess,
  shape: EventShape,
): Warming {
  const resistance = scan.heatFlowUnit === 'W/kg' ? 0 : (input.calibration.resistanceKPerW ?? 0);
  if (!(resistance > 0)) return { at: () => 0, mean: 0, most: 0, part: 0 };
  const warmedK = new Float64Array(w.t.length);
  const free = (i: number) => resistance * Math.max(0, trueSignal(w, shape, w.t[i], i).value);
  let [most, heat, weighted, before] = [0, 0, 0, free(x.from)];
  warmedK[x.from] = before;
  for (let i = x.from + 1; i < x.to; i++) {
    const dt = w.t[i] - w.t[i - 1];
    const now = free(i);
    if (contactS > 0) {
      // dΔT/dt = (free − ΔT)/τ along a straight piece of the heat set free, in closed form.
      const kept = Math.exp(-dt / contactS);
      const rise = ((now - before) * contactS) / dt;
      warmedK[i] = now - rise + (warmedK[i - 1] - before + rise) * kept;
    } else warmedK[i] = now;
    most = Math.max(most, warmedK[i]);
    heat += dt * now;
    weighted += dt * now * warmedK[i];
    before = now;
  }
  warmedK.fill(0, x.to);
  return {
    at: (t) => interpolate(w.t, warmedK, t),
    mean: heat > 0 ? weighted / heat : 0,
    most,
    part: WARMING_ERROR_PART,
  };
}
