import { CONVERSION_GRID } from '../../schema/wire/reduced.ts';

/** J/(kg K), where the sheet gives none (METHODS 4.8). */
export const ASSUMED_HEAT_CAPACITY = 500;

/** Grid rows between which ln(−ln(1 − α)) of a JMAK event is straight in T: α = 0.2 and 0.7. */
const [LOW, HIGH] = [19, 69];
const TYPICAL_EXPONENT = 3;

/**
 * The self-heating number S = τ_s (ΔH/c_p) (dα/dt)_max E/(R T²) (METHODS 4.8): how much the event's own warmth speeds it up.
 * A single scan shows n E/(R T²) (the growth of ln(−ln(1−α)) a kelvin) but not its two factors: n is taken as 3, in the middle of its
 * range 1.5 to 4, so that S is right to a factor of two, as a warning should be.
 * @param contactS τ_s, s: the sample's part of the lag
 * @param curve temperatures and rates on the conversion grid   @param highestRatePerS (dα/dt)_max, 1/s
 */
export function selfHeatingNumber(
  contactS: number,
  enthalpyJPerKg: number,
  heatCapacityJPerKgK: number,
  curve: { temperatureK: Float64Array },
  highestRatePerS: number,
): number {
  const y = (k: number) => Math.log(-Math.log1p(-CONVERSION_GRID[k]));
  const steepness = (y(HIGH) - y(LOW)) / (curve.temperatureK[HIGH] - curve.temperatureK[LOW]);
  return (contactS * (enthalpyJPerKg / heatCapacityJPerKgK) * highestRatePerS * steepness) / TYPICAL_EXPONENT;
}
