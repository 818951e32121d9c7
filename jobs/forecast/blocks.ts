import type { GaussRule, Panels } from './programme.ts';

/** Programmes of more panels than this are cut into this many blocks for the draws. */
export const MOST_BLOCKS = 200;
const TWO_POINTS: GaussRule = { nodes: [0, 1], weights: [0.5, 0.5], exponentSpan: Number.NaN };

/**
 * Panels in blocks for the draws of one law. A block stands for its panels by the mean and spread of 1/T, weighted by the rate under `lnRate` (the
 * estimate), as two temperatures; its weight makes the integral of the estimate exact. A draw differs from the estimate by a smooth function of 1/T, which
 * two points carry to second order, so the spread of the draws is kept at a hundredth of the work. Times within a block are read off in proportion.
 */
export function blockPanels(panels: Panels, lnRate: (temperatureK: number) => number): Panels {
  const { weights, nodes } = panels.rule;
  const m = nodes.length;
  const count = panels.startS.length;
  const values = panels.nodeK.map(lnRate);
  let lnScale = Number.NEGATIVE_INFINITY;
  for (const v of values) if (v > lnScale) lnScale = v;
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
    // Where the rate is nothing throughout, plain time weighs instead: the block must stand somewhere.
    const sums = moments(from * m, to * m, (i) => weightOf(i) * Math.exp(values[i] - lnScale));
    const { total, mean, spread } = sums.total > 0 ? sums : moments(from * m, to * m, weightOf);
    out.startS[b] = panels.startS[from];
    out.lengthS[b] = panels.startS[to - 1] + panels.lengthS[to - 1] - panels.startS[from];
    out.fromK[b] = 1 / (mean + spread);
    out.toK[b] = 1 / Math.max(mean - spread, 1e-5);
    out.nodeK[2 * b] = out.fromK[b];
    out.nodeK[2 * b + 1] = out.toK[b];
    const here = (Math.exp(lnRate(out.fromK[b]) - lnScale) + Math.exp(lnRate(out.toK[b]) - lnScale)) / 2;
    out.weightS[b] = sums.total > 0 && here > 0 ? total / here : out.lengthS[b];
  }
  return out;

  function weightOf(i: number): number {
    return panels.lengthS[Math.floor(i / m)] * weights[i % m];
  }
  /** Weight, mean and standard deviation of 1/T over nodes first … end. */
  function moments(first: number, end: number, weight: (i: number) => number) {
    let [total, mean, square] = [0, 0, 0];
    for (let i = first; i < end; i++) {
      const w = weight(i);
      total += w;
      mean += w / panels.nodeK[i];
    }
    mean /= total;
    for (let i = first; i < end; i++) square += weight(i) * (1 / panels.nodeK[i] - mean) ** 2;
    return { total, mean, spread: Math.sqrt(square / total) };
  }
}
