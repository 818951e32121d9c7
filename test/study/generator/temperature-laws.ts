/** How the rate coefficient K (1/s) depends on temperature, written out here on purpose: nothing is shared with the fitting code. */

/** Molar gas constant, J/(mol K), exact since the 2019 SI. */
export const R = 8.31446261815324;

export interface TemperatureLaw {
  /** ln K at T, K in 1/s */
  lnK(temperatureK: number): number;
  /** −R d ln K / d(1/T), J/mol */
  localEnergy(temperatureK: number): number;
}

/** K = exp(lnPrefactor − E/(R T)). */
export function arrheniusLaw(energyJPerMol: number, lnPrefactor: number): TemperatureLaw {
  return {
    lnK: (temperatureK) => lnPrefactor - energyJPerMol / (R * temperatureK),
    localEnergy: () => energyJPerMol,
  };
}

/** Arrhenius law that has its JMAK peak near `peakK` at `rateKPerS`: ln K(Tp) = ln(β E/(R Tp²)). */
export function arrheniusLawWithPeak(
  energyJPerMol: number,
  peakK: number,
  rateKPerS: number,
): TemperatureLaw & { lnPrefactor: number } {
  const lnPrefactor = Math.log((rateKPerS * energyJPerMol) / (R * peakK ** 2)) + energyJPerMol / (R * peakK);
  return { ...arrheniusLaw(energyJPerMol, lnPrefactor), lnPrefactor };
}

/**
 * E_loc = E0 exp(q u), u = (1/T − 1/T_centre)/halfSpan: the integral over 1/T gives
 * ln K = lnKCentre − (E0 halfSpan/R) (exp(q u) − 1)/q.
 * @param halfSpanPerK half the span of 1/T over which the bend 2q is counted, 1/K
 */
export function bentLaw(settings: {
  energyJPerMol: number;
  bend: number;
  centreK: number;
  halfSpanPerK: number;
  lnKCentre: number;
}): TemperatureLaw {
  const { energyJPerMol, bend, centreK, halfSpanPerK, lnKCentre } = settings;
  const q = bend / 2;
  const u = (temperatureK: number): number => (1 / temperatureK - 1 / centreK) / halfSpanPerK;
  return {
    lnK(temperatureK) {
      const at = u(temperatureK);
      return lnKCentre - ((energyJPerMol * halfSpanPerK) / R) * (q === 0 ? at : Math.expm1(q * at) / q);
    },
    localEnergy: (temperatureK) => energyJPerMol * Math.exp(q * u(temperatureK)),
  };
}

/** Viscosity after Mauro et al., PNAS 106 (2009) 19780: T_g is where log10 η = 12, m the fragility there. */
export interface GlassFormer {
  glassTransitionK: number;
  fragility: number;
  /** log10 of the viscosity at infinite temperature, Pa s */
  log10Infinity: number;
}

export function log10Viscosity(
  { glassTransitionK, fragility, log10Infinity }: GlassFormer,
  temperatureK: number,
): number {
  const span = 12 - log10Infinity;
  const ratio = glassTransitionK / temperatureK;
  return log10Infinity + span * ratio * Math.exp((fragility / span - 1) * (ratio - 1));
}

/** d log10 η / d(1/T), K */
function viscositySlope({ glassTransitionK, fragility, log10Infinity }: GlassFormer, temperatureK: number): number {
  const span = 12 - log10Infinity;
  const ratio = glassTransitionK / temperatureK;
  const c = fragility / span - 1;
  return span * glassTransitionK * Math.exp(c * (ratio - 1)) * (1 + c * ratio);
}

/**
 * K ∝ η^−ξ [1 − exp(−Δμ/(R T))], Δμ = ΔH_m (T_m − T)/T_m (Turnbull), scaled so that K(anchorK) = exp(lnKAnchor).
 * Without `melting` the driving-force factor is 1.
 */
export function decoupledLaw(
  former: GlassFormer,
  settings: {
    decoupling: number;
    anchorK: number;
    lnKAnchor: number;
    melting?: { temperatureK: number; enthalpyJPerMol: number };
  },
): TemperatureLaw {
  const { decoupling, anchorK, lnKAnchor, melting } = settings;
  const lnDrive = (temperatureK: number): number => {
    if (!melting) return 0;
    const drive = (melting.enthalpyJPerMol * (1 - temperatureK / melting.temperatureK)) / (R * temperatureK);
    return drive > 0 ? Math.log(-Math.expm1(-drive)) : -Infinity;
  };
  const shape = (temperatureK: number): number =>
    -decoupling * Math.LN10 * log10Viscosity(former, temperatureK) + lnDrive(temperatureK);
  const shift = lnKAnchor - shape(anchorK);
  return {
    lnK: (temperatureK) => shift + shape(temperatureK),
    localEnergy(temperatureK) {
      const viscous = R * decoupling * Math.LN10 * viscositySlope(former, temperatureK);
      if (!melting) return viscous;
      // g = Δμ/(RT) = (ΔH/R)(1/T − 1/Tm): dg/d(1/T) = ΔH/R, d ln(1 − e^−g)/dg = 1/(e^g − 1)
      const g = (melting.enthalpyJPerMol / R) * (1 / temperatureK - 1 / melting.temperatureK);
      return viscous - melting.enthalpyJPerMol / Math.expm1(g);
    },
  };
}

/**
 * Glass transition at a heating rate, the scan having been cooled through it at the same rate: relaxation keeps pace,
 * so η(Tg(β)) β is the same at every rate; `glassTransitionK` of the former belongs to 10 K/min.
 */
export function glassTransitionAtRate(former: GlassFormer, rateKPerS: number): number {
  const wanted = 12 - Math.log10(rateKPerS / (10 / 60));
  let [low, high] = [former.glassTransitionK * 0.5, former.glassTransitionK * 3];
  for (let i = 0; i < 200; i++) {
    const middle = (low + high) / 2;
    if (log10Viscosity(former, middle) > wanted) low = middle;
    else high = middle;
  }
  return (low + high) / 2;
}
