import type { GapRow } from '../../schema/wire/campaign.ts';
import type { FlagCode } from '../../schema/wire/flags.ts';
import { chooseInstrument, type InstrumentReach, onInstrument } from './instrument-choice.ts';
import { compareText, decadeOf, decadeStart, type RateGroup, rateText, SAME_RATE } from './rates.ts';

/** Fewest distinct rates that a fit accepts, and how many are recommended. */
export const FEWEST_RATES = 3;
export const RECOMMENDED_RATES = 5;
/** Smallest span of rates, as a factor. */
export const LEAST_SPAN = 10;

interface SampleView {
  sample: string;
  groups: readonly RateGroup[];
  reaches: readonly InstrumentReach[];
  used: ReadonlySet<string>;
}

const gap = (view: SampleView, code: FlagCode, detail: string, action: string): GapRow => ({
  sample: view.sample,
  code,
  detail,
  action,
});

/** Gap rows of one sample in fixed order: few-rates, narrow-span, decade-gap, instruments-not-bridged, no-replicate. */
export function findSampleGaps(
  sample: string,
  groups: readonly RateGroup[],
  reaches: readonly InstrumentReach[],
): GapRow[] {
  const used = new Set(groups.flatMap((g) => g.scans.map((s) => s.instrument)));
  const view: SampleView = { sample, groups, reaches, used };
  return [
    ...findFewRates(view),
    ...findNarrowSpan(view),
    ...findDecadeGaps(view),
    ...findUnbridged(view),
    ...findNoReplicate(view),
  ];
}

function findFewRates(view: SampleView): GapRow[] {
  const count = view.groups.length;
  if (count >= FEWEST_RATES) return [];
  const detail =
    count === 0
      ? `No scan with a known heating rate; a fit needs at least ${FEWEST_RATES} distinct rates, ${RECOMMENDED_RATES} are recommended.`
      : `Only ${count} distinct heating rate${count === 1 ? '' : 's'} (${view.groups.map((g) => rateText(g.rateKPerS)).join(', ')}); a fit needs at least ${FEWEST_RATES}, ${RECOMMENDED_RATES} are recommended.`;
  const missing = FEWEST_RATES - count;
  const suggested = suggestRates(view, missing);
  return [
    gap(
      view,
      'few-rates',
      detail,
      `Run ${suggested} at least, and better ${RECOMMENDED_RATES - count} further rates in all.`,
    ),
  ];
}

/** New rates that widen the span first: a factor of ten on either side of what is there, else 10, 40 and 2 K/min. */
function suggestRates(view: SampleView, count: number): string {
  const { groups, reaches, used } = view;
  const low = groups.at(0)?.rateKPerS;
  const high = groups.at(-1)?.rateKPerS;
  const wished =
    low === undefined || high === undefined ? [10 / 60, 40 / 60, 2 / 60] : [high * 4, low / 4, high * 16, low / 16];
  const reachable = wished.filter((rate) => chooseInstrument(rate, reaches, used));
  const picked = (reachable.length >= count ? reachable : wished).slice(0, count);
  return picked.map((rate) => `${rateText(rate)} ${onInstrument(rate, reaches, used)}`).join(' and ');
}

function findNarrowSpan(view: SampleView): GapRow[] {
  const { groups, reaches, used } = view;
  if (groups.length === 0) return [];
  const low = groups[0].rateKPerS;
  const high = groups[groups.length - 1].rateKPerS;
  const span = high / low;
  // Measured rates scatter around the programmed ones: a programmed factor of ten must not be flagged for that.
  if (span >= LEAST_SPAN / (1 + SAME_RATE)) return [];
  const up = low * LEAST_SPAN;
  const down = high / LEAST_SPAN;
  const rate = chooseInstrument(up, reaches, used) || !chooseInstrument(down, reaches, used) ? up : down;
  return [
    gap(
      view,
      'narrow-span',
      `Heating rates span a factor of ${Number(span.toPrecision(3))} (${rateText(low)} to ${rateText(high)}); below ${LEAST_SPAN} the activation energy rests on a narrow range of temperature.`,
      `Run ${rate === up ? 'at or above' : 'at or below'} ${rateText(rate)} ${onInstrument(rate, reaches, used)}.`,
    ),
  ];
}

function findDecadeGaps(view: SampleView): GapRow[] {
  const { groups, reaches, used } = view;
  const rows: GapRow[] = [];
  for (let i = 1; i < groups.length; i++) {
    const below = groups[i - 1].rateKPerS;
    const above = groups[i].rateKPerS;
    // 9.99 and 100.1 K/s enclose the whole decade 10–100 only by the scatter of the rates.
    if (above / below <= 10 * (1 + SAME_RATE)) continue;
    for (let decade = decadeOf(below) + 1; decade < decadeOf(above); decade++) {
      const low = decadeStart(decade);
      const high = decadeStart(decade + 1);
      const rate = low * 3;
      rows.push(
        gap(
          view,
          'decade-gap',
          `No scan between ${low} and ${high} K/s, while there are scans at ${rateText(below)} below and ${rateText(above)} above.`,
          `Run about ${rateText(rate)} ${onInstrument(rate, reaches, used)}.`,
        ),
      );
    }
  }
  return rows;
}

interface Island {
  instruments: string[];
  rates: number[];
}

/** Instruments joined by shared rates, directly or through a third one, form one island; islands by their slowest rate. */
function findIslands(groups: readonly RateGroup[]): Island[] {
  const islands: { names: Set<string>; rates: number[] }[] = [];
  for (const group of groups) {
    const names = new Set(group.scans.map((s) => s.instrument));
    const touched = islands.filter((island) => [...names].some((n) => island.names.has(n)));
    const joined = { names: new Set(names), rates: [group.rateKPerS] };
    for (const island of touched) {
      for (const name of island.names) joined.names.add(name);
      joined.rates.push(...island.rates);
      islands.splice(islands.indexOf(island), 1);
    }
    islands.push(joined);
  }
  return islands
    .map(({ names, rates }) => ({ instruments: [...names].sort(compareText), rates: rates.sort((a, b) => a - b) }))
    .sort((a, b) => a.rates[0] - b.rates[0] || compareText(a.instruments[0], b.instruments[0]));
}

function findUnbridged(view: SampleView): GapRow[] {
  const islands = findIslands(view.groups);
  return islands.slice(1).map((fast, i) => {
    const slow = islands[i];
    const describe = (island: Island): string =>
      `${island.instruments.join(' + ')} (${rateText(island.rates[0])} to ${rateText(island.rates[island.rates.length - 1])})`;
    return gap(
      view,
      'instruments-not-bridged',
      `${describe(slow)} and ${describe(fast)} share no heating rate (within ${SAME_RATE * 100} %), so an offset between them cannot be told from the material.`,
      adviseBridge(view, slow, fast),
    );
  });
}

function adviseBridge(view: SampleView, slow: Island, fast: Island): string {
  const reachOf = (island: Island) => view.reaches.filter((r) => island.instruments.includes(r.instrument));
  const reaches = (rate: number, island: Island) =>
    reachOf(island).find((r) => rate >= r.minKPerS && rate <= r.maxKPerS)?.instrument;
  // A rate that one side has run already costs one scan less.
  for (const rate of [...slow.rates].reverse()) {
    const other = reaches(rate, fast);
    if (other) return `Run ${rateText(rate)} on ${other} too.`;
  }
  for (const rate of fast.rates) {
    const other = reaches(rate, slow);
    if (other) return `Run ${rateText(rate)} on ${other} too.`;
  }
  const top = Math.max(slow.rates[slow.rates.length - 1], ...reachOf(slow).map((r) => r.maxKPerS));
  const bottom = Math.min(fast.rates[0], ...reachOf(fast).map((r) => r.minKPerS));
  const rate = Math.sqrt(top * bottom);
  return `Run one rate on both, as near as they come to ${rateText(rate)}: the fastest that ${slow.instruments.join(' + ')} allows and the slowest that ${fast.instruments.join(' + ')} allows.`;
}

function findNoReplicate(view: SampleView): GapRow[] {
  const { groups } = view;
  if (groups.length === 0) return [];
  const repeated = groups.some((g) => new Set(g.scans.map((s) => s.instrument)).size < g.scans.length);
  if (repeated) return [];
  const middle = groups[Math.floor((groups.length - 1) / 2)];
  return [
    gap(
      view,
      'no-replicate',
      `${groups.length === 1 ? 'The one heating rate was not' : `None of the ${groups.length} heating rates was`} measured twice on one instrument, so the scatter from one mount to the next is not known.`,
      `Repeat ${rateText(middle.rateKPerS)} on ${middle.scans[0].instrument} with a fresh mount.`,
    ),
  ];
}
