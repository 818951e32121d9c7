/** A reaction model f(α) of dα/dt = K(T) f(α), as in ICTAC's table (Vyazovkin et al. 2011, Thermochim. Acta 520:1, table 1). */
export interface ReactionModel {
  name: string;
  rate(alpha: number): number;
}

const avrami = (n: number): ReactionModel => ({
  name: `A${n}`,
  rate: (a) => n * (1 - a) * (-Math.log1p(-a)) ** ((n - 1) / n),
});

/** Avrami–Erofeev A1 (first order) … A4, contracting area and volume, power laws, diffusion in one and three dimensions. */
export const REACTION_MODELS: readonly ReactionModel[] = [
  { name: 'F1', rate: (a) => 1 - a },
  avrami(1.5),
  avrami(2),
  avrami(2.5),
  avrami(3),
  avrami(4),
  { name: 'R2', rate: (a) => 2 * Math.sqrt(1 - a) },
  { name: 'R3', rate: (a) => 3 * Math.cbrt(1 - a) ** 2 },
  { name: 'P2', rate: (a) => 2 * Math.sqrt(a) },
  { name: 'P3', rate: (a) => 3 * Math.cbrt(a) ** 2 },
  { name: 'D1', rate: (a) => 1 / (2 * a) },
  { name: 'D3', rate: (a) => (1.5 * Math.cbrt(1 - a) ** 2) / (1 - Math.cbrt(1 - a)) },
];
