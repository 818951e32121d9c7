import type { CoverageScan } from '../../schema/wire/campaign.ts';
import type { InstrumentKind } from '../../schema/wire/states.ts';
import { compareText } from './rates.ts';

export interface PlannedInstrument {
  instrument: string;
  kind: InstrumentKind;
  /** Number of scans of a standard behind its calibration. */
  standards: number;
}

/** Rates that each kind of calorimeter usually reaches, K/s. */
export const KIND_RATES: Record<InstrumentKind, readonly [number, number]> = {
  furnace: [0.01, 8],
  chip: [10, 50_000],
};

/** An instrument with the rates it has shown in this campaign and those it should reach. */
export interface InstrumentReach extends PlannedInstrument {
  minKPerS: number;
  maxKPerS: number;
}

/**
 * What each instrument reaches: the usual range of its kind, widened by what it has been run at on any sample.
 */
export function reachOfInstruments(
  instruments: readonly PlannedInstrument[],
  scans: readonly CoverageScan[],
): InstrumentReach[] {
  return instruments
    .map((instrument) => {
      const rates = scans
        .filter((s) => s.instrument === instrument.instrument)
        .map((s) => Math.abs(s.rateKPerS))
        .filter((r) => Number.isFinite(r) && r > 0);
      const [low, high] = KIND_RATES[instrument.kind];
      return { ...instrument, minKPerS: Math.min(low, ...rates), maxKPerS: Math.max(high, ...rates) };
    })
    .sort((a, b) => compareText(a.instrument, b.instrument));
}

/** The instrument to run a rate on: one already used for the sample first, then any; undefined when none reaches it. */
export function chooseInstrument(
  rateKPerS: number,
  reaches: readonly InstrumentReach[],
  used: ReadonlySet<string>,
): InstrumentReach | undefined {
  const able = reaches.filter((r) => rateKPerS >= r.minKPerS && rateKPerS <= r.maxKPerS);
  return able.find((r) => used.has(r.instrument)) ?? able[0];
}

/** «on NAME», or what is needed where no instrument of the campaign reaches the rate. */
export function onInstrument(
  rateKPerS: number,
  reaches: readonly InstrumentReach[],
  used: ReadonlySet<string>,
): string {
  const choice = chooseInstrument(rateKPerS, reaches, used);
  if (choice) return `on ${choice.instrument}`;
  return rateKPerS > KIND_RATES.furnace[1]
    ? 'on an instrument that reaches it, such as a chip calorimeter (none of this campaign does)'
    : 'on an instrument that reaches it, such as a furnace calorimeter (none of this campaign does)';
}
