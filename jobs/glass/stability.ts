/** Numbers of glass stability from Tg, the onset of crystallisation Tx and the melting (or liquidus) temperature Tm, K. */
export interface Stability {
  /** ΔTx = Tx − Tg, K */
  supercooledRangeK: number;
  /** Trg = Tg/Tm (Turnbull 1969, Contemp. Phys. 10:473) */
  reducedGlassTransition?: number;
  /** (Tx − Tg)/(Tm − Tx) (Hrubý 1972, Czech. J. Phys. B 22:1187) */
  hruby?: number;
}

export function stabilityNumbers(glassTransitionK: number, onsetK: number, meltingK?: number): Stability {
  const supercooledRangeK = onsetK - glassTransitionK;
  if (meltingK === undefined) return { supercooledRangeK };
  return {
    supercooledRangeK,
    reducedGlassTransition: glassTransitionK / meltingK,
    ...(meltingK > onsetK && { hruby: supercooledRangeK / (meltingK - onsetK) }),
  };
}
