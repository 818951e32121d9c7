import { integrate } from './integrator.ts';
import type { Programme } from './programme.ts';
import type { InstrumentModel, ScanSolution } from './scan-model.ts';

export interface StandardMetal {
  symbol: string;
  /** K, ITS-90 freezing point (Preston-Thomas, Metrologia 27 (1990) 3) */
  meltingK: number;
  enthalpyJPerKg: number;
  /** J/(kg K) near the melting point, rounded, from memory: sets the step under the peak only */
  heatCapacityJPerKgK: number;
}

/** Enthalpies of fusion: In, Archer & Rudtsch, J. Chem. Eng. Data 48 (2003) 1157; Zn, CRC Handbook as stored in the open library `chemicals`; Sn 60.4 J/g from memory. */
export const METALS: Record<'In' | 'Sn' | 'Zn', StandardMetal> = {
  In: { symbol: 'In', meltingK: 429.7485, enthalpyJPerKg: 28_662.4, heatCapacityJPerKgK: 240 },
  Sn: { symbol: 'Sn', meltingK: 505.078, enthalpyJPerKg: 60_400, heatCapacityJPerKgK: 250 },
  Zn: { symbol: 'Zn', meltingK: 692.677, enthalpyJPerKg: 108_106, heatCapacityJPerKgK: 450 },
};

/**
 * Enthalpy passes through 0 where melting begins, with a kink there: a tolerance relative to it alone would allow no step at all. 1e-7 J/kg is
 * 4e-12 of an enthalpy of fusion.
 */
const TOLERANCE = { relativeTolerance: 1e-11, absoluteTolerance: 1e-7 };

/**
 * Melting of a pure metal behind a contact resistance. The state is the metal's enthalpy h (J/kg, 0 = solid at T_m), so
 * that the plateau needs no switching: h' = c_p (T_L − T(h))/contact, T(h) = T_m while 0 ≤ h ≤ ΔH. T_L follows the
 * programme with the rest of the shift, so an onset is reported shift + response (s × rate) late, as for a sample.
 * @param contactS the metal's own part of the shift, s, > 0: the slope of the leading edge is m c_p β/contact
 */
export function solveStandard(
  metal: StandardMetal,
  instrument: InstrumentModel,
  contactS: number,
  programme: Programme,
  massKg: number,
  timeS: Float64Array,
): ScanSolution {
  const restS = instrument.shiftS - contactS;
  if (!(contactS > 0 && restS >= 0))
    throw new RangeError(`the contact's lag must be in (0, ${instrument.shiftS}] s: ${contactS}`);
  const { meltingK, enthalpyJPerKg, heatCapacityJPerKgK: capacity } = metal;
  const { responseS } = instrument;
  if (programme.legs.length !== 1)
    throw new RangeError(`a standard is melted in one ramp: got ${programme.legs.length} legs`);
  const [leg] = programme.legs;
  const temperatureOf = (h: number): number =>
    meltingK + (h < 0 ? h : h > enthalpyJPerKg ? h - enthalpyJPerKg : 0) / capacity;
  const flow = (t: number, y: Float64Array): number =>
    ((restS > 0 ? y[0] : leg.temperatureK(t)) - temperatureOf(y[1])) * (capacity / contactS);
  const startK = leg.temperatureK(0);
  const count = timeS.length;
  const solution: ScanSolution = {
    timeS,
    programmeK: timeS.map((t) => leg.temperatureK(t)),
    sampleK: new Float64Array(count),
    conversion: [new Float64Array(count)],
    ratePerS: [new Float64Array(count)],
    eventW: new Float64Array(count),
    signalW: new Float64Array(count),
  };
  integrate(
    (t, y, out) => {
      out[0] = restS > 0 ? (leg.temperatureK(t) - y[0]) / restS : 0;
      out[1] = flow(t, y);
      out[2] = responseS > 0 ? (-out[1] - y[2]) / responseS : 0;
    },
    0,
    [startK, (startK - meltingK) * capacity, 0],
    timeS,
    (k, t, y) => {
      const molten = y[1] > 0 && y[1] < enthalpyJPerKg;
      solution.sampleK[k] = temperatureOf(y[1]);
      solution.conversion[0][k] = Math.min(1, Math.max(0, y[1] / enthalpyJPerKg));
      solution.ratePerS[0][k] = molten ? flow(t, y) / enthalpyJPerKg : 0;
      solution.signalW[k] = massKg * (responseS > 0 ? y[2] : -flow(t, y));
      // Height of the peak over the level of plain warming, for noise fractions.
      solution.eventW[k] = -solution.signalW[k] - massKg * capacity * leg.rateKPerS(t);
    },
    TOLERANCE,
  );
  return solution;
}
