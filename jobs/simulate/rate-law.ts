import { GAS_CONSTANT } from '../../schema/wire/units.ts';

/** K(T) = exp(lnPrefactor − E/(R T)), K in 1/s. */
export interface ArrheniusLaw {
  kind: 'arrhenius';
  energyJPerMol: number;
  /** ln of the prefactor in 1/s */
  lnPrefactor: number;
}

/**
 * The law with a bend: local activation energy E_loc(x) = E0 exp(q u) with x = 1/T, u = (x − x0)/Δx.
 * E stays positive; q = 0 is Arrhenius.
 */
export interface BentLaw {
  kind: 'bent';
  /** E0 = E_loc at the reference temperature, J/mol */
  energyJPerMol: number;
  /** 1/x0, K */
  referenceK: number;
  /** Δx: half the span of 1/T over which E changes by the factor exp(±q), 1/K */
  halfSpanPerK: number;
  bend: number;
  /** ln K at the reference temperature, K in 1/s */
  lnRateAtReference: number;
}

export type RateLaw = ArrheniusLaw | BentLaw;

/** E_loc(T) = −R d ln K/d(1/T), J/mol. */
export function localEnergy(law: RateLaw, temperatureK: number): number {
  if (law.kind === 'arrhenius') return law.energyJPerMol;
  const u = (1 / temperatureK - 1 / law.referenceK) / law.halfSpanPerK;
  return law.energyJPerMol * Math.exp(law.bend * u);
}

/**
 * ln K(T), K in 1/s. The bent law integrates in closed form: d ln K/dx = −E_loc/R gives
 * ln K = ln K0 − (E0 Δx/R) (exp(q u) − 1)/q, whose limit for q → 0 is −E0 (x − x0)/R.
 */
export function lnRateConstant(law: RateLaw, temperatureK: number): number {
  if (law.kind === 'arrhenius') return law.lnPrefactor - law.energyJPerMol / (GAS_CONSTANT * temperatureK);
  const u = (1 / temperatureK - 1 / law.referenceK) / law.halfSpanPerK;
  // The quotient loses its digits where bend · u underflows; there the series is exact.
  const integral = Math.abs(law.bend) < 1e-10 ? u * (1 + (law.bend * u) / 2) : Math.expm1(law.bend * u) / law.bend;
  return law.lnRateAtReference - (law.energyJPerMol * law.halfSpanPerK * integral) / GAS_CONSTANT;
}

/**
 * The bent law that goes from one local energy at a lower temperature to another at a higher one, placed so that an
 * event peaks near the lower temperature at the given rate (peak condition ln β = ln K + ln(R T²/E)).
 */
export function bentLawBetween(
  low: { temperatureK: number; energyJPerMol: number },
  high: { temperatureK: number; energyJPerMol: number },
  rateKPerS: number,
): BentLaw {
  const xLow = 1 / low.temperatureK;
  const xHigh = 1 / high.temperatureK;
  const law: BentLaw = {
    kind: 'bent',
    energyJPerMol: Math.sqrt(low.energyJPerMol * high.energyJPerMol),
    referenceK: 2 / (xLow + xHigh),
    halfSpanPerK: (xLow - xHigh) / 2,
    bend: Math.log(low.energyJPerMol / high.energyJPerMol) / 2,
    lnRateAtReference: 0,
  };
  const wanted = Math.log((rateKPerS * low.energyJPerMol) / (GAS_CONSTANT * low.temperatureK ** 2));
  return { ...law, lnRateAtReference: wanted - lnRateConstant(law, low.temperatureK) };
}

/** The Arrhenius law of energy E whose event peaks near the given temperature at the given rate (same peak condition). */
export function arrheniusLawAt(energyJPerMol: number, temperatureK: number, rateKPerS: number): ArrheniusLaw {
  const lnRate = Math.log((rateKPerS * energyJPerMol) / (GAS_CONSTANT * temperatureK ** 2));
  return { kind: 'arrhenius', energyJPerMol, lnPrefactor: lnRate + energyJPerMol / (GAS_CONSTANT * temperatureK) };
}
