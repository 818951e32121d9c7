/**
 * The law that holds over all instruments of an event: JMAK with the verdict's bent rate law,
 * K(x) = exp(lnRateAtMiddle − (E0 Δx/R)(e^(q u) − 1)/q), u = (x − x0)/Δx, x = 1/T, α = 1 − exp[−(∫K dt)^n].
 * With `driving` it is multiplied by D(T)/D(1/x0), D = 1 − exp(−Δμ/(R T)) after Turnbull, and E_loc falls by −R d ln D/d(1/T).
 * Written by the verdict, read by forecasts and advice.
 */
export interface SharedLaw {
  sample: string;
  event: number;
  /** ln K at x0, K in 1/s */
  lnRateAtMiddle: number;
  /** E0, J/mol: local energy at x0, driving force left out */
  energyJPerMol: number;
  /** q; 0 is Arrhenius. The bend over the measured span is B = 2 q. */
  bend: number;
  /** 1/K */
  x0PerK: number;
  dxPerK: number;
  avramiExponent: number;
  /** K: below it E_loc is held at its value there (lower of the glass transition and the slowest measured temperature) */
  frozenBelowK: number;
  /** K: measured temperatures the law was fitted on */
  lowestMeasuredK: number;
  highestMeasuredK: number;
  glassTransitionK?: number;
  /** Melting temperature, K, and enthalpy a mole of what attaches, where the law carries the driving force of both */
  driving?: { temperatureK: number; enthalpyJPerMol: number };
}

/** The same parameters in the Monte Carlo draws of the fit, one entry a draw, correlated across columns. */
export interface SharedLawDraws {
  lnRateAtMiddle: Float64Array;
  energyJPerMol: Float64Array;
  bend: Float64Array;
  avramiExponent: Float64Array;
}
