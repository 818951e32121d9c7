import type { ForecastQuestion, ProgrammeTable } from '../../schema/wire/forecasts.ts';
import { GAS_CONSTANT } from '../../schema/wire/units.ts';
import { findRoot } from '../numeric/root.ts';
import { blockPanels, MOST_BLOCKS } from './blocks.ts';
import { extentOf, type Kinetics, TEMPERATURE_RANGE } from './kinetics.ts';
import { accumulate, COARSE, checkProgramme, FINE, layPanels, type Panels } from './programme.ts';

/** A question made ready: what each law answers on the even scale (ln t, ln X or K); `fine` for the estimate, coarser panels for draws. */
export interface Ask {
  answer(kinetics: Kinetics): number;
  /** The same for a draw, in less work where a programme is long. @param estimate the law that it is a draw of */
  answerDraw(draw: Kinetics, estimate: Kinetics): number;
  /** Temperatures that matter, K: where the middle 95 % of ∫K dt builds up; for a limit the limit itself */
  activeK(kinetics: Kinetics): [number, number];
  /** ln of the factor in time by which another answer differs from the reference's */
  lnFactor(reference: Kinetics, other: Kinetics, exponent: number): number;
}

/** @throws RangeError for a question outside its range, quoting the value */
export function prepareQuestion(q: ForecastQuestion, kinetics: readonly Kinetics[]): Ask {
  checkQuestion(q);
  if ('programme' in q)
    return askProgramme(q.programme, q.question === 'time_to_conversion' ? q.conversion : undefined, kinetics);
  switch (q.question) {
    case 'time_to_conversion':
      return {
        answer: (k) => k.lnTime(q.conversion, q.temperatureK),
        answerDraw: (k) => k.lnTime(q.conversion, q.temperatureK),
        activeK: () => [q.temperatureK, q.temperatureK],
        lnFactor: (a, b) => b.lnTime(q.conversion, q.temperatureK) - a.lnTime(q.conversion, q.temperatureK),
      };
    case 'conversion_at_end':
      return {
        answer: (k) => k.extent(q.temperatureK, q.timeS),
        answerDraw: (k) => k.extent(q.temperatureK, q.timeS),
        activeK: () => [q.temperatureK, q.temperatureK],
        lnFactor: (a, b, exponent) =>
          (a.extent(q.temperatureK, q.timeS) - b.extent(q.temperatureK, q.timeS)) / exponent,
      };
    case 'temperature_limit':
      return {
        answer: (k) => temperatureLimit(k, q.conversion, q.timeS),
        answerDraw: (k) => temperatureLimit(k, q.conversion, q.timeS),
        activeK: (k) => {
          const T = temperatureLimit(k, q.conversion, q.timeS);
          return [T, T];
        },
        lnFactor: (a, b) => b.lnTime(q.conversion, temperatureLimit(a, q.conversion, q.timeS)) - Math.log(q.timeS),
      };
  }
}

/**
 * The highest temperature at which a conversion is not reached within a time: the root of ln t(T), bracketed between 20 K and the temperature
 * where crystallisation is fastest. NaN where even there it takes longer.
 */
export function temperatureLimit(k: Kinetics, conversion: number, timeS: number): number {
  const excess = (x: number) => Math.max(-1e6, Math.min(1e6, k.lnTime(conversion, 1 / x) - Math.log(timeS)));
  const [cold, hot] = [1 / TEMPERATURE_RANGE.lowest, 1 / k.fastestK];
  if (excess(hot) > 0 || excess(cold) < 0) return Number.NaN;
  return 1 / findRoot(excess, hot, cold, 1e-15);
}

function askProgramme(programme: ProgrammeTable, conversion: number | undefined, kinetics: readonly Kinetics[]): Ask {
  const steepness = (T: number) => {
    let most = 0;
    for (const k of kinetics) most = Math.max(most, k.steepness(T));
    return most;
  };
  const breaks = [...new Set(kinetics.flatMap((k) => k.breaksK))];
  const fine = layPanels(programme, steepness, breaks, FINE);
  const coarse = layPanels(programme, steepness, breaks, COARSE);
  const answer = (k: Kinetics, panels: Panels) =>
    conversion === undefined ? k.extentOn(panels) : Math.log(k.timeOn(panels, conversion));
  const blocks = new Map<Kinetics, Panels>();
  const forDraws = (estimate: Kinetics): Panels => {
    if (coarse.startS.length <= 2 * MOST_BLOCKS) return coarse;
    const made = blocks.get(estimate) ?? blockPanels(coarse, estimate.lnRate);
    blocks.set(estimate, made);
    return made;
  };
  return {
    answer: (k) => answer(k, fine),
    answerDraw: (draw, estimate) => answer(draw, forDraws(estimate)),
    activeK: (k) => activeTemperatures(coarse, k),
    lnFactor(a, b, exponent) {
      if (conversion === undefined) return (answer(a, fine) - answer(b, fine)) / exponent;
      // Where a programme races through the event, times agree whatever the laws say: the extents at one moment are compared.
      const timeS = a.timeOn(fine, conversion);
      const until = cutProgramme(programme, timeS);
      const panels = layPanels(until, steepness, breaks, FINE);
      return (extentOf(conversion) - b.extentOn(panels)) / exponent;
    },
  };
}

/** The programme up to a time after its start; past its end it stays at its last temperature. */
function cutProgramme({ name, timeS, temperatureK }: ProgrammeTable, untilS: number): ProgrammeTable {
  const end = timeS[0] + Math.min(untilS, 1e30);
  const keep = timeS.findIndex((t) => t >= end);
  const rows = keep < 0 ? timeS.length : Math.max(1, keep);
  const i = Math.min(rows, timeS.length - 1);
  const last =
    keep <= 0
      ? temperatureK[i]
      : temperatureK[i - 1] +
        ((temperatureK[i] - temperatureK[i - 1]) * (end - timeS[i - 1])) / (timeS[i] - timeS[i - 1]);
  return {
    name,
    timeS: Float64Array.from([
      ...timeS.subarray(0, rows),
      Math.max(end, timeS[rows - 1] + 1e-9 * (1 + Math.abs(timeS[rows - 1]))),
    ]),
    temperatureK: Float64Array.from([...temperatureK.subarray(0, rows), last]),
  };
}

/** Temperatures between which the middle 95 % of ∫K dt of a programme builds up. */
function activeTemperatures(panels: Panels, k: Kinetics): [number, number] {
  const { sums } = accumulate(panels, k.lnRate);
  const total = sums[sums.length - 1];
  const order = Array.from(sums.keys()).sort((a, b) => panels.fromK[a] - panels.fromK[b]);
  const share = (p: number) => (total > 0 ? (sums[p] - (p === 0 ? 0 : sums[p - 1])) / total : 1 / sums.length);
  let sum = 0;
  let low = Number.NaN;
  let high = Number.NaN;
  for (const p of order) {
    const middle = (panels.fromK[p] + panels.toK[p]) / 2;
    sum += share(p);
    if (Number.isNaN(low) && sum >= 0.025) low = middle;
    if (Number.isNaN(high) && sum >= 0.975) high = middle;
  }
  const last = panels.toK[order[order.length - 1]];
  return [Number.isNaN(low) ? last : low, Number.isNaN(high) ? last : high];
}

function checkQuestion(q: ForecastQuestion): void {
  if ('conversion' in q && !(q.conversion > 0 && q.conversion < 1))
    throw new RangeError(`conversion not in (0, 1): ${q.conversion}`);
  if ('temperatureK' in q && !(q.temperatureK > 0 && q.temperatureK < 1e4))
    throw new RangeError(`temperature not in 0 … 10 000 K: ${q.temperatureK} K`);
  if ('timeS' in q && !(q.timeS > 0 && Number.isFinite(q.timeS)))
    throw new RangeError(`time not above 0 s: ${q.timeS}`);
  if ('programme' in q) checkProgramme(q.programme);
}

/** Decades of rate coefficient between two temperatures by the law. */
export const decadesBetween = (k: Kinetics, aK: number, bK: number): number => {
  const difference = Math.abs(k.lnRate(aK) - k.lnRate(bK)) / Math.LN10;
  // Above melting there is no rate: then the distance by the law's local energy alone.
  return Number.isFinite(difference)
    ? difference
    : (k.steepness(bK) / GAS_CONSTANT / Math.LN10) * Math.abs(1 / aK - 1 / bK);
};
