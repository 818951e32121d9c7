import type { ModelFreeCurve } from '../../schema/wire/forecasts.ts';
import { GAS_CONSTANT } from '../../schema/wire/units.ts';
import { extentOf, type Kinetics, TEMPERATURE_RANGE } from './kinetics.ts';
import { type Panels, partOfPanel } from './programme.ts';

/** Largest exponent taken: beyond it a segment passes at once, and the number must stay finite. */
const MOST_EXPONENT = 600;
/** Steps of the share table, and its last conversion. */
const STEP = 0.01;
const LAST = 0.99;

/**
 * The isoconversional prediction (Vyazovkin & Sbirrazzuoli 2006, Macromol. Rapid Commun. 27:1515): each segment of conversion
 * takes the same ∫exp(−E_α/RT) dt along any programme. At a constant temperature t_α = Σ_k exp[lnStep_k + (E_k/R)(1/T − x0)].
 * @param energy J/mol, one a segment   @param lnStep one a segment
 */
export function modelFreeKinetics(
  curve: ModelFreeCurve,
  energy: ArrayLike<number> = curve.energyJPerMol,
  lnStep: ArrayLike<number> = curve.lnStep,
): Kinetics {
  const count = curve.conversions.length;
  const middle = energy[count >> 1];
  let steepest = 0;
  for (let k = 0; k < count; k++) steepest = Math.max(steepest, Math.abs(energy[k]));
  const lnNeeded = (k: number, T: number) => lnStep[k] + (energy[k] / GAS_CONSTANT) * (1 / T - curve.x0PerK);
  const needed = (k: number, T: number) => Math.exp(Math.min(MOST_EXPONENT, lnNeeded(k, T)));
  /** Share of segment k done in a second at T */
  const pace = (k: number, T: number) => Math.exp(Math.min(MOST_EXPONENT, -lnNeeded(k, T)));
  const most = shareAt(curve, LAST).share;

  /** Runs through segments along the panels. `stop`: segment and share at which the time is wanted; without it, the conversion at the end. */
  const run = (panels: Panels, stop?: { segment: number; share: number }) => {
    const { nodes, weights } = panels.rule;
    let k = 0;
    let share = 0;
    const goalOf = (segment: number) =>
      stop && segment === stop.segment ? stop.share : segment === count - 1 ? most : 1;
    for (let p = 0; p < panels.startS.length; p++) {
      let from = 0;
      for (;;) {
        const T1 = panels.fromK[p];
        const dT = panels.toK[p] - T1;
        let mean = 0;
        for (let q = 0; q < nodes.length; q++) mean += weights[q] * pace(k, T1 + dT * (from + (1 - from) * nodes[q]));
        const gained = mean * (1 - from) * panels.weightS[p];
        const goal = goalOf(k);
        if (share + gained < goal) {
          share += gained;
          break;
        }
        const segment = k;
        from = partOfPanel(panels, p, (T) => pace(segment, T), goal - share, from);
        if (stop && k === stop.segment)
          return { timeS: panels.startS[p] + from * panels.lengthS[p], segment: k, share: goal };
        if (k === count - 1) return { timeS: panels.endS, segment: k, share: most };
        k++;
        share = 0;
      }
    }
    let timeS = panels.endS;
    if (stop) {
      for (let s = k; s <= stop.segment; s++) timeS += (goalOf(s) - (s === k ? share : 0)) * needed(s, panels.endK);
    }
    return { timeS, segment: k, share };
  };

  return {
    lnTime(conversion, T) {
      const { segment, share } = shareAt(curve, conversion);
      let highest = lnNeeded(segment, T) + Math.log(share);
      for (let k = 0; k < segment; k++) highest = Math.max(highest, lnNeeded(k, T));
      let sum = share * Math.exp(lnNeeded(segment, T) - highest);
      for (let k = 0; k < segment; k++) sum += Math.exp(lnNeeded(k, T) - highest);
      return highest + Math.log(sum);
    },
    extent(T, timeS) {
      let left = timeS;
      for (let k = 0; k < count; k++) {
        const whole = needed(k, T);
        if (k === count - 1 || left < whole) return extentOf(conversionAt(curve, k, Math.min(most, left / whole)));
        left -= whole;
      }
      throw new RangeError('a model-free curve has no segments');
    },
    timeOn: (panels, conversion) => run(panels, shareAt(curve, conversion)).timeS,
    extentOn(panels) {
      const { segment, share } = run(panels);
      return extentOf(conversionAt(curve, segment, share));
    },
    lnRate: (T) => -(middle / GAS_CONSTANT) * (1 / T - curve.x0PerK),
    steepness: () => steepest,
    breaksK: [],
    fastestK: TEMPERATURE_RANGE.highest,
    mostConversion: LAST,
  };
}

const segmentOf = ({ conversions }: ModelFreeCurve, conversion: number): number => {
  const k = conversions.findIndex((a) => conversion <= a + 1e-12);
  return k < 0 ? conversions.length - 1 : k;
};

/** Rows of the share table that belong to segment k, first and last index. */
function rowsOf({ conversions, share }: ModelFreeCurve, k: number): [number, number] {
  const first = k === 0 ? 0 : Math.round(conversions[k - 1] / STEP);
  const last = k === conversions.length - 1 ? share.length - 1 : Math.round(conversions[k] / STEP) - 1;
  return [first, last];
}

/** X = −ln(1 − α) in row g of the share table. */
const tableX = (g: number): number => -Math.log1p(-(g + 1) * STEP);
/** Power by which the share rises with X below 1 %: ∫K dt ∝ X^(1/n) in every law of nucleation and growth. */
const startPower = ({ share }: ModelFreeCurve): number =>
  Math.log(share[1] / share[0]) / Math.log(tableX(1) / tableX(0));

/** The segment a conversion lies in, and the share of it done by then. Between the rows of the table: straight, in the logarithms of X and share in the first segment. */
function shareAt(curve: ModelFreeCurve, conversion: number): { segment: number; share: number } {
  if (!(conversion > 0 && conversion <= LAST + 1e-12))
    throw new RangeError(`a model-free forecast needs a conversion in (0, ${LAST}]: ${conversion}`);
  const segment = segmentOf(curve, conversion);
  const { share } = curve;
  if (conversion <= STEP)
    return { segment, share: share[0] * (-Math.log1p(-conversion) / tableX(0)) ** startPower(curve) };
  const [first, last] = rowsOf(curve, segment);
  const upper = Math.min(last, Math.max(first, Math.ceil(conversion / STEP - 1 - 1e-9)));
  const a2 = (upper + 1) * STEP;
  const a1 = a2 - STEP;
  const s1 = upper === first ? 0 : share[upper - 1];
  const s2 = share[upper];
  if (segment === 0)
    return {
      segment,
      share:
        s2 *
        (s1 / s2) ** (Math.log(tableX(upper) / -Math.log1p(-conversion)) / Math.log(tableX(upper) / tableX(upper - 1))),
    };
  return { segment, share: s1 + ((conversion - a1) / STEP) * (s2 - s1) };
}

/** Inverse of `shareAt` within one segment. */
function conversionAt(curve: ModelFreeCurve, segment: number, share: number): number {
  const [first, last] = rowsOf(curve, segment);
  const table = curve.share;
  if (segment === 0 && share <= table[0])
    return Math.max(Number.MIN_VALUE, -Math.expm1(-tableX(0) * (share / table[0]) ** (1 / startPower(curve))));
  let upper = first;
  while (upper < last && table[upper] < share) upper++;
  const a2 = (upper + 1) * STEP;
  const s1 = upper === first ? 0 : table[upper - 1];
  const s2 = table[upper];
  if (segment === 0) {
    const part = Math.log(s2 / share) / Math.log(s2 / s1);
    return -Math.expm1(-tableX(upper) * (tableX(upper - 1) / tableX(upper)) ** part);
  }
  return Math.min(a2, a2 - STEP + (STEP * (share - s1)) / (s2 - s1));
}
