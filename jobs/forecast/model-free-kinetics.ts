import type { ModelFreeCurve, ModelFreeDraws } from '../../schema/wire/forecasts.ts';
import { GAS_CONSTANT } from '../../schema/wire/units.ts';
import { extentOf, type Kinetics, TEMPERATURE_RANGE } from './kinetics.ts';
import { type Panels, partOfPanel } from './programme.ts';

/** Largest exponent taken: beyond it a segment passes at once, and the number must stay finite. */
const MOST_EXPONENT = 600;
/** Steps of the share table, and its last conversion. */
const STEP = 0.01;
const LAST = 0.99;

/** What all draws of one description share. */
interface Shape {
  curve: ModelFreeCurve;
  count: number;
  /** Share of the last segment that is done at the last conversion */
  most: number;
  /** The place of the conversion asked for last: a question asks all draws for the same one */
  asked: number;
  place: Place;
}

/** Segment that a conversion lies in, and the share of it done by then, with its logarithm. */
interface Place {
  segment: number;
  share: number;
  lnShare: number;
}

/**
 * The isoconversional prediction (Vyazovkin & Sbirrazzuoli 2006, Macromol. Rapid Commun. 27:1515): each segment of conversion
 * takes the same ∫exp(−E_α/RT) dt along any programme. At a constant temperature t_α = Σ_k exp[lnStep_k + (E_k/R)(1/T − x0)].
 */
export class ModelFreeKinetics implements Kinetics {
  readonly mostConversion = LAST;
  readonly fastestK = TEMPERATURE_RANGE.highest;
  readonly breaksK: readonly number[] = [];

  /** @param steepest J/mol, the largest |E| of its segments   @param at where its own begin in `a` and `c` of the shape */
  constructor(
    private readonly shape: Shape,
    private readonly a: Float64Array,
    private readonly c: Float64Array,
    private readonly steepest: number,
    private readonly at: number,
  ) {}

  lnTime(conversion: number, T: number): number {
    const { a, c, at } = this;
    const { segment, lnShare } = this.placeOf(conversion);
    const x = 1 / T;
    const end = at + segment;
    const last = a[end] + c[end] * x + lnShare;
    if (segment === 0) return last;
    let highest = last;
    for (let k = at; k < end; k++) highest = Math.max(highest, a[k] + c[k] * x);
    let sum = Math.exp(last - highest);
    for (let k = at; k < end; k++) sum += Math.exp(a[k] + c[k] * x - highest);
    return highest + Math.log(sum);
  }

  extent(T: number, timeS: number): number {
    const { curve, count, most } = this.shape;
    let left = timeS;
    for (let k = 0; ; k++) {
      const whole = this.needed(k, T);
      if (k === count - 1 || left < whole) return extentOf(conversionAt(curve, k, Math.min(most, left / whole)));
      left -= whole;
    }
  }

  timeOn(panels: Panels, conversion: number): number {
    return this.run(panels, this.placeOf(conversion)).timeS;
  }

  extentOn(panels: Panels): number {
    const { segment, share } = this.run(panels);
    return extentOf(conversionAt(this.shape.curve, segment, share));
  }

  lnRate(T: number): number {
    return this.c[this.at + (this.shape.count >> 1)] * (this.shape.curve.x0PerK - 1 / T);
  }

  steepness(): number {
    return this.steepest;
  }

  private needed(k: number, T: number): number {
    return Math.exp(Math.min(MOST_EXPONENT, this.a[this.at + k] + this.c[this.at + k] / T));
  }

  /** Share of segment k done in a second at T */
  private pace(k: number, T: number): number {
    return Math.exp(Math.min(MOST_EXPONENT, -this.a[this.at + k] - this.c[this.at + k] / T));
  }

  private placeOf(conversion: number): Place {
    const { shape } = this;
    if (conversion !== shape.asked) {
      shape.place = placeAt(shape.curve, conversion);
      shape.asked = conversion;
    }
    return shape.place;
  }

  /** Runs through segments along the panels. @param stop where the time is wanted; without it, the conversion at the end */
  private run(panels: Panels, stop?: Place): { timeS: number; segment: number; share: number } {
    const { count, most } = this.shape;
    const { nodes, weights } = panels.rule;
    const { nodeK, weightS, fromK, toK } = panels;
    const m = nodes.length;
    const goalOf = (segment: number) =>
      stop && segment === stop.segment ? stop.share : segment === count - 1 ? most : 1;
    let k = 0;
    let share = 0;
    let goal = goalOf(0);
    for (let p = 0; p < weightS.length; p++) {
      let from = 0;
      for (;;) {
        let mean = 0;
        if (from === 0) for (let q = 0; q < m; q++) mean += weights[q] * this.pace(k, nodeK[p * m + q]);
        else {
          const [T1, dT] = [fromK[p], toK[p] - fromK[p]];
          for (let q = 0; q < m; q++) mean += weights[q] * this.pace(k, T1 + dT * (from + (1 - from) * nodes[q]));
        }
        const gained = mean * (1 - from) * weightS[p];
        if (share + gained < goal) {
          share += gained;
          break;
        }
        const segment = k;
        from = partOfPanel(panels, p, (T) => this.pace(segment, T), goal - share, from);
        if (stop && k === stop.segment)
          return { timeS: panels.startS[p] + from * panels.lengthS[p], segment: k, share: goal };
        if (k === count - 1) return { timeS: panels.endS, segment: k, share: most };
        k++;
        share = 0;
        goal = goalOf(k);
      }
    }
    let timeS = panels.endS;
    if (stop) {
      for (let s = k; s <= stop.segment; s++)
        timeS += (goalOf(s) - (s === k ? share : 0)) * this.needed(s, panels.endK);
    }
    return { timeS, segment: k, share };
  }
}

/** The estimate of a model-free description, and as many draws as there are, those with a number that is not finite left out. */
export function modelFreeKinetics(
  curve: ModelFreeCurve,
  drawn?: ModelFreeDraws,
): { estimate: ModelFreeKinetics; draws: ModelFreeKinetics[] } {
  const count = curve.conversions.length;
  const shape: Shape = {
    curve,
    count,
    most: shareAt(curve, LAST).share,
    asked: LAST,
    place: placeAt(curve, LAST),
  };
  const make = (energy: Float64Array, lnStep: Float64Array): ModelFreeKinetics[] => {
    const out: ModelFreeKinetics[] = [];
    const total = Math.floor(lnStep.length / count) * count;
    // Segment k needs e^(a_k + c_k/T) s; one array for all draws, no objects but the law itself.
    const c = Float64Array.from(energy, (E) => E / GAS_CONSTANT);
    const a = lnStep.map((v, i) => v - c[i] * curve.x0PerK);
    for (let at = 0; at < total; at += count) {
      if (!isWhole(c, at, count) || !isWhole(a, at, count)) continue;
      let steepest = 0;
      for (let k = at; k < at + count; k++) steepest = Math.max(steepest, Math.abs(energy[k]));
      out.push(new ModelFreeKinetics(shape, a, c, steepest, at));
    }
    return out;
  };
  const [estimate] = make(curve.energyJPerMol, curve.lnStep);
  return { estimate, draws: drawn ? make(drawn.energyJPerMol, drawn.lnStep) : [] };
}

export const placeAt = (curve: ModelFreeCurve, conversion: number): Place => {
  const { segment, share } = shareAt(curve, conversion);
  return { segment, share, lnShare: Math.log(share) };
};

/** Whether `count` values from `from` on are all finite, and there is one. */
export function isWhole(values: ArrayLike<number>, from = 0, count = values.length): boolean {
  for (let i = from; i < from + count; i++) if (!Number.isFinite(values[i])) return false;
  return count > 0;
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

/** The place of a conversion. Between the rows of the table: straight, in the logarithms of X and share in the first segment. */
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
