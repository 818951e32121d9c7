import { GAS_CONSTANT } from '../../../schema/wire/units.ts';
import { type BentScale, bendTerm } from '../../laws/bend.ts';
import { lnDrivingFactor, type Melting, turnbullDrivingForce } from '../driving-force.ts';

/**
 * At which rate a characteristic temperature of a JMAK event comes to lie at T, for the bent law. The usual peak condition is
 * ln β = ln K + ln(R T²/E_loc); to first order only, and off by some per cent of a ten-fold bend. Here it is taken further.
 *
 * On a ramp X(T) = ∫K dT/β = K G/β. With s = ln K(T) − ln K(T'), G = ∫_0^∞ e^−s g(T'(s)) ds, g = R T'²/E_loc(T') = dT'/d ln K, by
 * Gauss–Laguerre: for the bent law T'(s) is closed, e^(q u') = e^(q u) + q s/A, A = E0 Δx/R. Then dG/dT = G1 = 1 − G/g and
 * G2 = (G g'/g − G1)/g. Each characteristic temperature has its own X there:
 *   T at α = 0.5: ln X = ln(ln 2)/n;
 *   peak: d²α/dt² = 0 gives Xⁿ = 1 − G1/n;
 *   time centroid: n ln X is the logarithm of an exponential variable (mean −γ, variance π²/6, third moment −2 ζ(3)), and T(ln X) has
 *   T' = G, T'' = G G1, T''' = G (G1² + G G2), so that the mean of T lies at ln X = −γ/n − d with
 *   d = −G1 (v + d²)/2 − (G1² + G G2)(μ + 3 v d)/6.
 *
 * With a driving force K carries D(T)/D(1/x0), D = 1 − exp(−γ), γ = (ΔH/R)(1/T − 1/Tm): every node is weighted by D(T')/D(T), and with
 * L = d ln K/dT = 1/g + d ln D/dT in the place of 1/g, G1 = 1 − G L and G2 = −(G1 L + G dL/dT).
 */
export type Characteristic = 'centroid' | 'peak' | 'half';

const NODES = [
  0.2228466041792607, 1.1889321016726226, 2.992736326059314, 5.77514356910451, 9.83746741838259, 15.982873980601703,
];
const WEIGHTS = [
  0.45896467394996476, 0.41700083077212, 0.11337338207404488, 0.010399197453149087, 2.6101720281493265e-4,
  8.985479064296213e-7,
];
const EULER = 0.5772156649015329;
const ZETA3 = 1.2020569031595942;
/** An inverted bend lets ln K fall by so much only; nodes beyond are held at this part of the local energy. */
const LEAST_PART = 0.05;

/** Newton stops at a step of this part of T: what is left is its square. */
const ENOUGH = 1e-5;
const BELOW_MELTING = 0.9995;

/** ln β at T with its derivatives; made once, filled in place. */
export interface ConditionValue {
  value: number;
  byTemperature: number;
  byLogEnergy: number;
  byBend: number;
}

/**
 * The condition of one kind of characteristic temperature at one Avrami exponent.
 * Derivatives leave out how ln X of the temperature moves with the parameters beyond first order; they steer the fit and its errors only.
 */
export class Condition {
  private readonly mean: number;
  private readonly variance: number;
  private readonly third: number;
  /** ΔH/R, K; 0 without a driving force */
  private readonly enthalpyK: number;
  private readonly meltingPerK: number;

  constructor(
    private readonly what: Characteristic,
    private readonly n: number,
    /** what carries the driving force, if the law has one */
    readonly driving?: Melting,
  ) {
    this.mean = -EULER / n;
    this.variance = (Math.PI * Math.PI) / (6 * n * n);
    this.third = (-2 * ZETA3) / n ** 3;
    this.enthalpyK = driving ? driving.enthalpyJPerMol / GAS_CONSTANT : 0;
    this.meltingPerK = driving ? 1 / driving.temperatureK : 0;
  }

  /** The same condition for a law with the driving force of a melting crystal. */
  withDriving(driving: Melting): Condition {
    return new Condition(this.what, this.n, driving);
  }

  /** @param lnK0 ln K at the scale's middle   @param lnEnergy ln(E0 / (J/mol))   @param q bend parameter */
  evaluate(T: number, lnK0: number, lnEnergy: number, q: number, scale: BentScale, out: ConditionValue): void {
    const u = (1 / T - scale.x0) / scale.dx;
    const energy0 = Math.exp(lnEnergy);
    const term = bendTerm(q, u);
    const A = (energy0 * scale.dx) / GAS_CONSTANT;
    const local = Math.exp(q * u);
    const c = 1 / (A * local);
    const { enthalpyK, meltingPerK } = this;
    let G = 0;
    let byLogEnergy = 0;
    let byBend = 0;
    for (let k = 0; k < NODES.length; k++) {
      const s = NODES[k] * c;
      const z = Math.max(LEAST_PART - 1, q * s);
      const small = Math.abs(z) < 1e-4;
      const step = small ? s * (1 - z / 2 + (z * z) / 3) : Math.log1p(z) / q;
      const at = u + step;
      const Tk = 1 / (scale.x0 + scale.dx * at);
      let w = (WEIGHTS[k] * Tk * Tk) / (A * local * (1 + z));
      let byStep = -2 * scale.dx * Tk - q;
      if (enthalpyK > 0) {
        const drive = -Math.expm1(-enthalpyK * (1 / Tk - meltingPerK));
        w *= drive;
        byStep += (scale.dx * enthalpyK * (1 - drive)) / drive;
      }
      G += w;
      byLogEnergy += w * (-1 + byStep * (-s / (1 + z)));
      // d step/dq at fixed T: z grows as q e^(−q u).
      const moves = small ? -u * s - 0.5 * s * s : ((s * (1 - q * u)) / (1 + z) - step) / q;
      byBend += w * (-at + byStep * moves);
    }
    // A carried E0 Δx/R; g = R T²/E has no Δx.
    G *= scale.dx;
    byLogEnergy *= scale.dx / G;
    byBend *= scale.dx / G;
    const g = T * T * scale.dx * c;
    const perEnergy = g / (T * T);
    const g1 = perEnergy * (2 * T + q / scale.dx);
    let L = 1 / g;
    let slopeOfL = -g1 / (g * g);
    let lnDrive = 0;
    if (enthalpyK > 0) {
      const drive = -Math.expm1(-enthalpyK * (1 / T - meltingPerK));
      const perDrive = enthalpyK / (T * T * drive);
      const fall = perDrive * (1 - drive);
      L -= fall;
      slopeOfL += (2 * fall) / T - perDrive * fall;
      lnDrive = Math.log(drive) - this.lnReference(scale);
      G /= drive;
    }
    const G1 = 1 - G * L;
    const G2 = -(G1 * L + G * slopeOfL);
    const own = this.lnExtended(G, G1, G2);
    out.value = lnK0 - A * term.value + lnDrive + Math.log(G) - own.lnX;
    out.byTemperature = L + G1 / G - own.byG1 * G2;
    // G1 goes as 1/E0, and with q as the slope of g does.
    out.byLogEnergy = -A * term.value + byLogEnergy + own.byG1 * G1;
    out.byBend = -A * term.byQ + byBend - own.byG1 * (perEnergy / scale.dx - u * G1);
  }

  /** ln D at the middle of the scale, where ln K is ln K0. */
  private lnReference({ x0 }: BentScale): number {
    return this.driving ? lnDrivingFactor(turnbullDrivingForce(this.driving, 1 / x0), 1 / x0) : 0;
  }

  private lnExtended(G: number, G1: number, G2: number): { lnX: number; byG1: number } {
    const { n, variance: v } = this;
    if (this.what === 'half') return { lnX: Math.log(Math.LN2) / n, byG1: 0 };
    if (this.what === 'peak') return { lnX: Math.log(Math.max(0.1, 1 - G1 / n)) / n, byG1: -1 / (n * n) };
    const b = (G1 * G1 + G * G2) / 6;
    let d = -G1 * (v / 2) - b * this.third;
    d = (-G1 * (v + d * d)) / 2 - b * (this.third + 3 * v * d);
    d = (-G1 * (v + d * d)) / 2 - b * (this.third + 3 * v * d);
    return { lnX: this.mean - d, byG1: v / 2 };
  }

  /** T at which the condition holds for ln β, by Newton from `start`. Fills `out` at the solution. */
  solve(
    lnRate: number,
    start: number,
    lnK0: number,
    lnEnergy: number,
    q: number,
    scale: BentScale,
    out: ConditionValue,
  ): number {
    // At melting nothing drives the crystal: the condition is looked for below it.
    const top = this.driving ? BELOW_MELTING * this.driving.temperatureK : Number.POSITIVE_INFINITY;
    let T = Math.min(start, top);
    for (let i = 0; i < 30; i++) {
      this.evaluate(T, lnK0, lnEnergy, q, scale, out);
      const step = (lnRate - out.value) / out.byTemperature;
      T = Math.min(T + Math.max(-0.1 * T, Math.min(0.1 * T, step)), (T + top) / 2, top);
      if (!(Math.abs(step) > ENOUGH * T)) break;
    }
    return T;
  }
}
