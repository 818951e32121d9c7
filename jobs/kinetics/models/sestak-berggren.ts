import { GAS_CONSTANT } from '../../../schema/wire/units.ts';
import { solveSymmetric } from '../../numeric/linear-solve.ts';
import { CONVERSION_COUNT, CONVERSIONS, type EventColumns } from '../event-data.ts';

export interface SestakBerggrenEstimate {
  /** J/mol */
  energy: number;
  /** A in 1/s */
  lnPrefactor: number;
  m: number;
  n: number;
  /** root mean square residual of ln(dα/dt) */
  residualRms: number;
}

const LN_A = CONVERSIONS.map((a) => Math.log(a));
const LN_1A = CONVERSIONS.map((a) => Math.log1p(-a));
/** Order of the unknowns in the normal equations: constant, 1/T, ln α, ln(1−α). */
const P = 4;

/**
 * Šesták–Berggren law dα/dt = A exp(−E/RT) α^M (1−α)^N (Šesták & Berggren 1971, Thermochim. Acta 3:1) over all curve scans at once, linear in its
 * logarithm (combined kinetic analysis: Pérez-Maqueda et al. 2006, J. Phys. Chem. A 110:12456).
 * @param weights of the curve scans   @returns undefined when the scans do not determine all four
 */
export function fitSestakBerggren(
  d: EventColumns,
  curves: ArrayLike<number>,
  weights: ArrayLike<number>,
): SestakBerggrenEstimate | undefined {
  let inverse = 0;
  for (let j = 0; j < curves.length; j++) {
    inverse += 1 / d.temperatureK[curves[j] * CONVERSION_COUNT + (CONVERSION_COUNT >> 1)] / curves.length;
  }
  const normal = new Float64Array(P * P);
  const b = new Float64Array(P);
  const row = new Float64Array(P);
  let yy = 0;
  let sw = 0;
  for (let j = 0; j < curves.length; j++) {
    const w = weights[j];
    for (let k = 0; k < CONVERSION_COUNT; k++) {
      const at = curves[j] * CONVERSION_COUNT + k;
      fill(row, k, d.temperatureK[at], inverse);
      const y = d.lnRate[at];
      sw += w;
      yy += w * y * y;
      for (let r = 0; r < P; r++) {
        b[r] += w * row[r] * y;
        for (let c = 0; c < P; c++) normal[r * P + c] += w * row[r] * row[c];
      }
    }
  }
  const rhs = Float64Array.from(b);
  if (!solveSymmetric(normal, rhs, P)) return undefined;
  const [constant, slope, m, n] = rhs;
  const energy = -slope * 1e-3 * GAS_CONSTANT;
  let explained = 0;
  for (let r = 0; r < P; r++) explained += rhs[r] * b[r];
  return {
    energy: energy * 1e6,
    lnPrefactor: constant + (energy * 1e6 * inverse) / GAS_CONSTANT,
    m,
    n,
    residualRms: Math.sqrt(Math.max(0, yy - explained) / sw),
  };
}

/** 1/T enters in 1/kK about its middle, so that the columns are of one size. */
function fill(row: Float64Array, k: number, temperatureK: number, inverse: number): void {
  row[0] = 1;
  row[1] = 1e3 * (1 / temperatureK - inverse);
  row[2] = LN_A[k];
  row[3] = LN_1A[k];
}
