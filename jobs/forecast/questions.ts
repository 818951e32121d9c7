import type { ForecastQuestion, ProgrammeTable } from '../../schema/wire/forecasts.ts';
import { GAS_CONSTANT } from '../../schema/wire/units.ts';
import { findRoot } from '../numeric/root.ts';
import { blockPanels, MOST_BLOCKS } from './blocks.ts';
import { extentOf, type Kinetics, TEMPERATURE_RANGE } from './kinetics.ts';
import { type Accumulated, accumulate, COARSE, checkProgramme, FINE, layPanels, type Panels } from './programme.ts';

/** Draws run along the blocks of a programme of more panels than this, along coarser panels of a shorter one. */
const LONG_PROGRAMME = 3 * MOST_BLOCKS;
/** Bins of temperature in which the weight of a programme is counted. */
const BINS = 1024;
/** Secants that find a limit near another one; they end at rounding after about five. */
const MOST_SECANTS = 12;

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
    case 'temperature_limit': {
      const limit = once((k) => temperatureLimit(k, q.conversion, q.timeS));
      return {
        answer: limit,
        answerDraw: (k, estimate) => temperatureLimit(k, q.conversion, q.timeS, limit(estimate)),
        activeK: (k) => [limit(k), limit(k)],
        lnFactor: (a, b) => b.lnTime(q.conversion, limit(a)) - Math.log(q.timeS),
      };
    }
  }
}

/**
 * The highest temperature at which a conversion is not reached within a time: the root of ln t(T), looked for from a temperature nearby by
 * secants in 1/T, else bracketed between 20 K and the temperature where crystallisation is fastest. NaN where even there it takes longer.
 */
export function temperatureLimit(k: Kinetics, conversion: number, timeS: number, nearK?: number): number {
  const lnTime = Math.log(timeS);
  const excess = (x: number) => Math.max(-1e6, Math.min(1e6, k.lnTime(conversion, 1 / x) - lnTime));
  const [cold, hot] = [1 / TEMPERATURE_RANGE.lowest, 1 / k.fastestK];
  if (excess(hot) > 0 || excess(cold) < 0) return Number.NaN;
  if (nearK !== undefined && Number.isFinite(nearK)) {
    let [x, f] = [1 / nearK, excess(1 / nearK)];
    let slope = k.steepness(nearK) / GAS_CONSTANT;
    for (let i = 0; i < MOST_SECANTS; i++) {
      const next = x - f / slope;
      if (!(next > hot && next < cold)) break;
      if (Math.abs(next - x) <= 1e-14 * x) return 1 / next;
      const g = excess(next);
      slope = (g - f) / (next - x);
      [x, f] = [next, g];
      if (f === 0) return 1 / x;
    }
  }
  return 1 / findRoot(excess, hot, cold, 1e-15);
}

function askProgramme(programme: ProgrammeTable, conversion: number | undefined, kinetics: readonly Kinetics[]): Ask {
  const steepness = (T: number) => {
    let most = 0;
    for (const k of kinetics) most = Math.max(most, k.steepness(T));
    return most;
  };
  const breaks = kinetics.flatMap((k) => k.breaksK);
  const fine = layPanels(programme, steepness, breaks, FINE);
  const answerOn = (k: Kinetics, panels: Panels, done?: Accumulated) =>
    conversion === undefined ? k.extentOn(panels, done) : Math.log(k.timeOn(panels, conversion, done));
  const sums = once((k: Kinetics) => accumulate(fine, (T) => k.lnRate(T)));
  const answer = once((k: Kinetics) => answerOn(k, fine, sums(k)));
  const long = fine.startS.length > LONG_PROGRAMME;
  const coarse = long ? undefined : layPanels(programme, steepness, breaks, COARSE);
  const forDraws = once((estimate: Kinetics) => coarse ?? blockPanels(fine, (T) => estimate.lnRate(T), sums(estimate)));
  return {
    answer,
    answerDraw: (draw, estimate) => answerOn(draw, forDraws(estimate)),
    activeK: (k) => activeTemperatures(fine, sums(k)),
    lnFactor(a, b, exponent) {
      if (conversion === undefined) return (answer(a) - answer(b)) / exponent;
      // Where a programme races through the event, times agree whatever the laws say: the extents at one moment are compared.
      const until = cutProgramme(programme, Math.exp(answer(a)));
      const panels = layPanels(until, steepness, breaks, FINE);
      return (extentOf(conversion) - b.extentOn(panels)) / exponent;
    },
  };
}

/** A function of a law that works each law out once. */
function once<T>(of: (k: Kinetics) => T): (k: Kinetics) => T {
  const known = new Map<Kinetics, T>();
  return (k) => {
    let found = known.get(k);
    if (found === undefined) {
      found = of(k);
      known.set(k, found);
    }
    return found;
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

/**
 * Temperatures between which the middle 95 % of ∫K dt of a programme builds up, as middles of its panels in the order of their starting
 * temperatures. Panels are counted into narrow bins of temperature first, so that only the two bins in question are sorted.
 */
function activeTemperatures(panels: Panels, { sums }: Accumulated): [number, number] {
  const { fromK, toK } = panels;
  const total = sums[sums.length - 1];
  const share = (p: number) => (total > 0 ? (sums[p] - (p === 0 ? 0 : sums[p - 1])) / total : 1 / sums.length);
  let [least, most] = [Number.POSITIVE_INFINITY, 0];
  for (let p = 0; p < fromK.length; p++) {
    least = Math.min(least, fromK[p]);
    most = Math.max(most, fromK[p]);
  }
  const binOf = (T: number) => Math.min(BINS - 1, Math.floor(((T - least) / (most - least || 1)) * BINS));
  const bins = new Float64Array(BINS);
  for (let p = 0; p < fromK.length; p++) bins[binOf(fromK[p])] += share(p);
  const reach = (wanted: number): number => {
    let [bin, sum] = [0, 0];
    while (bin < BINS - 1 && sum + bins[bin] < wanted) sum += bins[bin++];
    const inBin: number[] = [];
    for (let p = 0; p < fromK.length; p++) if (binOf(fromK[p]) === bin) inBin.push(p);
    inBin.sort((a, b) => fromK[a] - fromK[b]);
    let at = inBin[inBin.length - 1];
    for (const p of inBin) {
      sum += share(p);
      at = p;
      if (sum >= wanted) break;
    }
    return at === undefined ? most : (fromK[at] + toK[at]) / 2;
  };
  return [reach(0.025), reach(0.975)];
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
