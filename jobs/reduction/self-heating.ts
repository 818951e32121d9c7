import { CONVERSION_GRID, type ReducedCurve } from '../../schema/wire/reduced.ts';
import type { ScanContext } from './scan-context.ts';

/** J/(kg K), where the sheet gives none. */
const ASSUMED_HEAT_CAPACITY = 500;
/** Grid rows between which ln(−ln(1 − α)) of a JMAK event is straight in T: α = 0.2 and 0.7. */
const [LOW, HIGH] = [19, 69];
const TYPICAL_EXPONENT = 3;

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
 * @param height of the event, signal units   @param enthalpyJPerKg where known
 */
export function selfHeatingOf(
  { input, scan }: ScanContext,
  curve: ReducedCurve,
  height: number,
  enthalpyJPerKg: number | undefined,
): SelfHeating | undefined {
  const { resistanceKPerW, lagS, responseS } = input.calibration;
  const y = (k: number) => Math.log(-Math.log1p(-CONVERSION_GRID[k]));
  const steepness = (y(HIGH) - y(LOW)) / (curve.temperatureK[HIGH] - curve.temperatureK[LOW]) / TYPICAL_EXPONENT;
  if (resistanceKPerW !== undefined && scan.heatFlowUnit !== 'W/kg') {
    return { number: resistanceKPerW * height * steepness, bound: false, heatCapacityAssumed: false };
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
