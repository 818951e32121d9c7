import { fitLaw, type LawData, type LawFit } from './law-fit.ts';

/** Beyond this the profile is not followed: the bend's limit is then told as this. */
const LARGEST = 2.9;
const STEPS = 12;

/**
 * Interval of q by profile likelihood: where the deviance, minimised over everything else, is t² above its minimum.
 * @param t quantile of Student's distribution   @param se standard error of q, as a first step
 */
export function profileLimits(d: LawData, full: LawFit, t: number, se: number): [number, number] {
  return [limit(d, full, t, se, -1), limit(d, full, t, se, 1)];
}

function limit(d: LawData, full: LawFit, t: number, se: number, side: 1 | -1): number {
  let from: ArrayLike<number> = Float64Array.from(full.parameters.filter((_, k) => k !== full.layout.bend));
  /** root of the rise of the deviance − t: nearly a straight line in q */
  const excess = (q: number): number => {
    const fit = fitLaw(d, { ...full.settings, bend: q }, from);
    if (!Number.isFinite(fit.deviance)) return Number.POSITIVE_INFINITY;
    if (fit.converged) from = fit.parameters;
    return Math.sqrt(Math.max(0, fit.deviance - full.deviance)) - t;
  };
  const end = side * LARGEST;
  let inner = full.q;
  let innerValue = -t;
  let outer = full.q;
  let outerValue = -t;
  for (let step = t * se; outerValue < 0; step *= 1.6) {
    inner = outer;
    innerValue = outerValue;
    outer = full.q + side * step;
    if (!(Math.abs(outer) < LARGEST)) {
      outer = end;
      outerValue = excess(end);
      if (outerValue < 0) return end;
      break;
    }
    outerValue = excess(outer);
  }
  // Illinois variant of false position: keeps the bracket and converges on a nearly straight line in a few steps.
  for (let i = 0; i < STEPS && Math.abs(outer - inner) > 1e-4; i++) {
    const at = Number.isFinite(outerValue)
      ? inner + ((outer - inner) * innerValue) / (innerValue - outerValue)
      : (inner + outer) / 2;
    const value = excess(at);
    if (Math.abs(value) < 1e-3) return at;
    if (value < 0) {
      inner = at;
      innerValue = value;
      outerValue = Number.isFinite(outerValue) ? outerValue / 2 : outerValue;
    } else {
      outer = at;
      outerValue = value;
      innerValue /= 2;
    }
  }
  return (inner + outer) / 2;
}
