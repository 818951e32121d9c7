import type { Accumulated, GaussRule, Panels } from './programme.ts';

/** Programmes of more panels than this are cut into this many blocks for the draws. */
export const MOST_BLOCKS = 200;
const TWO_POINTS: GaussRule = { nodes: [0, 1], weights: [0.5, 0.5], exponentSpan: Number.NaN };

/**
 * Panels in blocks for the draws of one law. A block stands for its panels by the mean and spread of 1/T, weighted by the rate of the
 * estimate, as two temperatures; its weight makes the integral of the estimate exact. A draw differs from the estimate by a smooth function of 1/T, which
 * two points carry to second order, so the spread of the draws is kept at a hundredth of the work. Times within a block are read off in proportion.
 * @param done `accumulate` of the panels and `lnRate`
 */
export function blockPanels(panels: Panels, lnRate: (temperatureK: number) => number, done: Accumulated): Panels {
  const { startS, lengthS, fromK, toK } = panels;
  const { sums, lnScale } = done;
  const count = startS.length;
  const blocks = Math.min(MOST_BLOCKS, count);
  const column = () => new Float64Array(blocks);
  const out: Panels = {
    name: panels.name,
    endS: panels.endS,
    endK: panels.endK,
    startS: column(),
    lengthS: column(),
    weightS: column(),
    fromK: column(),
    toK: column(),
    rule: TWO_POINTS,
    nodeK: new Float64Array(blocks * 2),
  };
  for (let b = 0; b < blocks; b++) {
    const from = Math.floor((b * count) / blocks);
    const to = Math.floor(((b + 1) * count) / blocks);
    const gained = sums[to - 1] - (from === 0 ? 0 : sums[from - 1]);
    // Where the rate is nothing throughout, plain time weighs instead: the block must stand somewhere.
    const weightOf = (p: number) => (gained > 0 ? sums[p] - (p === 0 ? 0 : sums[p - 1]) : lengthS[p]);
    let [total, mean, square] = [0, 0, 0];
    for (let p = from; p < to; p++) {
      const w = weightOf(p);
      total += w;
      mean += (2 * w) / (fromK[p] + toK[p]);
    }
    mean /= total;
    for (let p = from; p < to; p++) square += weightOf(p) * (2 / (fromK[p] + toK[p]) - mean) ** 2;
    const spread = Math.sqrt(square / total);
    out.startS[b] = startS[from];
    out.lengthS[b] = startS[to - 1] + lengthS[to - 1] - startS[from];
    out.fromK[b] = 1 / (mean + spread);
    out.toK[b] = 1 / Math.max(mean - spread, 1e-5);
    out.nodeK[2 * b] = out.fromK[b];
    out.nodeK[2 * b + 1] = out.toK[b];
    const here = (Math.exp(lnRate(out.fromK[b]) - lnScale) + Math.exp(lnRate(out.toK[b]) - lnScale)) / 2;
    out.weightS[b] = gained > 0 && here > 0 ? gained / here : out.lengthS[b];
  }
  return out;
}
