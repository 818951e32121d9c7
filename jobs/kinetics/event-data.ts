import type { FitScan } from '../../schema/wire/parameters.ts';
import { CONVERSION_GRID } from '../../schema/wire/reduced.ts';
import type { InstrumentCalibration } from '../../schema/wire/scan.ts';

/** Conversions of the isoconversional table: 0.05 … 0.95 (ICTAC 2011: step not above 0.05). */
export const CONVERSIONS: readonly number[] = Array.from({ length: 19 }, (_, k) => (k + 1) / 20);
export const CONVERSION_COUNT = CONVERSIONS.length;
/** Index of each in the reduced grid of 99. */
export const GRID_INDEX: readonly number[] = CONVERSIONS.map((a) =>
  CONVERSION_GRID.findIndex((g) => Math.abs(g - a) < 1e-9),
);
/** Pooled values are means over 0.1 … 0.9. */
export const POOLED = { from: 1, to: 18 } as const;
/** Rounding of a limit of conversion. */
const EDGE = 1e-9;
/** Fewer distinct rates than this and no method applies (ICTAC 2011: at least three programmes). */
export const LEAST_RATES = 3;

/**
 * What the methods work on: one event on n scans, columns only. Scan-major: value of scan i at conversion k is [i × 19 + k].
 * `hasCurve` is 0 for a scan that gives characteristic temperatures only.
 */
export interface EventColumns {
  n: number;
  rate: Float64Array;
  peakK: Float64Array;
  widthK: Float64Array;
  rampStartK: Float64Array;
  hasCurve: Uint8Array;
  temperatureK: Float64Array;
  lnRate: Float64Array;
}

export interface EventData extends EventColumns {
  event: number;
  scans: FitScan[];
  /** index into the instruments of the sample */
  instrument: Uint16Array;
  instruments: InstrumentCalibration[];
  baselineErrorK: Float64Array;
  /** 1 where the scan may be used at that conversion (not where a glass transition or melting reaches into the event) */
  usable: Uint8Array;
  /** Programme start → α = 0.01 → … → 0.99 as measured (lag removed), for integrals over T(t); undefined without a curve */
  programmes: ({ timeS: Float64Array; temperatureK: Float64Array; gridFrom: number } | undefined)[];
}

export function emptyColumns(n: number): EventColumns {
  return {
    n,
    rate: new Float64Array(n),
    peakK: new Float64Array(n),
    widthK: new Float64Array(n),
    rampStartK: new Float64Array(n),
    hasCurve: new Uint8Array(n),
    temperatureK: new Float64Array(n * CONVERSION_COUNT),
    lnRate: new Float64Array(n * CONVERSION_COUNT),
  };
}

/** Columns of one event, scans in a fixed order (rate, then hash) so that the order of arrival cannot matter. */
export function collectEvent(event: number, input: FitScan[], instruments: InstrumentCalibration[]): EventData {
  const scans = [...input].sort(
    (a, b) => a.event.rateKPerS - b.event.rateKPerS || (a.sha256 < b.sha256 ? -1 : 1) || a.segment - b.segment,
  );
  const n = scans.length;
  const used = instruments.filter((c) => scans.some((s) => s.instrument === c.instrument));
  // The spread stands last: V8 gives each object that is spread first and then added to a hidden class of its own, and code that has met the
  // class of another sample is thrown away and compiled again.
  const data: EventData = {
    event,
    scans,
    instruments: used,
    instrument: new Uint16Array(n),
    baselineErrorK: new Float64Array(n * CONVERSION_COUNT),
    usable: new Uint8Array(n * CONVERSION_COUNT),
    programmes: [],
    ...emptyColumns(n),
  };
  scans.forEach((scan, i) => {
    const e = scan.event;
    const at = used.findIndex((c) => c.instrument === scan.instrument);
    if (at < 0) throw new RangeError(`no calibration for instrument ${scan.instrument} of file ${scan.file}`);
    data.instrument[i] = at;
    data.rate[i] = e.rateKPerS;
    data.peakK[i] = e.peakK;
    data.widthK[i] = e.widthK;
    data.rampStartK[i] = e.rampStartK;
    const c = e.curve;
    if (!c) {
      data.programmes.push(undefined);
      return;
    }
    data.hasCurve[i] = 1;
    GRID_INDEX.forEach((g, k) => {
      data.temperatureK[i * CONVERSION_COUNT + k] = c.temperatureK[g];
      data.lnRate[i * CONVERSION_COUNT + k] = Math.log(c.ratePerS[g]);
      data.baselineErrorK[i * CONVERSION_COUNT + k] = c.baselineErrorK[g];
      const a = CONVERSIONS[k];
      if (isUsable(e, a)) data.usable[i * CONVERSION_COUNT + k] = 1;
    });
    const before = c.programmeTimeS.length - 1;
    const timeS = new Float64Array(before + c.timeS.length);
    const temperatureK = new Float64Array(timeS.length);
    timeS.set(c.programmeTimeS.subarray(0, before));
    temperatureK.set(c.programmeTemperatureK.subarray(0, before));
    timeS.set(c.timeS, before);
    temperatureK.set(c.temperatureK, before);
    data.programmes.push({ timeS, temperatureK, gridFrom: before });
  });
  return data;
}

/** Whether a scan counts at a conversion. */
export const isUsable = (e: FitScan['event'], conversion: number): boolean =>
  conversion > e.usableFrom - EDGE && conversion < e.usableTo + EDGE;

/** Weights of the curve scans once some conversions of some scans are left out. */
export interface UsableWeights {
  /** at each conversion; those of all scans where too few rates are left */
  at: Float64Array[];
  /** three distinct rates are left at that conversion, so it gets a number */
  determined: boolean[];
  /** for methods over whole curves: scans that are usable throughout, or all where those have too few rates */
  whole: Float64Array;
}

/**
 * @param weights of the curve scans   @param usable scan-major over all scans; all of them when missing
 * @param distinct how many programmes are distinct among some scans: heating rates unless said otherwise
 */
export function usableWeights(
  columns: Pick<EventColumns, 'rate'>,
  curves: ArrayLike<number>,
  weights: Float64Array,
  usable?: Uint8Array,
  distinct = (scans: number[]) => distinctRates(scans.map((i) => Math.abs(columns.rate[i]))).length,
): UsableWeights {
  const keep = (holds: (scan: number) => boolean) => {
    const kept = weights.map((w, j) => (holds(curves[j]) ? w : 0));
    const enough = distinct(Array.from(curves).filter((_, j) => kept[j] > 0)) >= LEAST_RATES;
    return { kept: enough ? kept : weights, enough };
  };
  const each = CONVERSIONS.map((_, k) => keep((i) => usable?.[i * CONVERSION_COUNT + k] !== 0));
  return {
    at: each.map((e) => e.kept),
    determined: each.map((e) => e.enough),
    whole: keep((i) => CONVERSIONS.every((_, k) => usable?.[i * CONVERSION_COUNT + k] !== 0)).kept,
  };
}

/** Mean over the pooled conversions that are determined; NaN where none is. */
export function pooledMean(values: ArrayLike<number>, determined: ArrayLike<boolean>): number {
  let sum = 0;
  let count = 0;
  for (let k = POOLED.from; k < POOLED.to; k++) {
    if (!determined[k]) continue;
    sum += values[k];
    count++;
  }
  return sum / count;
}

/** Holds further apart than this are different temperatures, K. */
export const APART_K = 0.5;

/** Hold temperatures that differ by more than half a kelvin. */
export function distinctTemperatures(temperatures: readonly number[]): number[] {
  const out: number[] = [];
  for (const T of [...temperatures].sort((a, b) => a - b)) {
    if (out.length === 0 || T > out[out.length - 1] + APART_K) out.push(T);
  }
  return out;
}

/** Distinct programmes among scans of any kind: rates of the ramps and temperatures of the holds. */
export function distinctProgrammes(scans: readonly FitScan[]): { rates: number[]; temperatures: number[] } {
  const ramps = scans.filter((s) => s.event.kind !== 'hold');
  return {
    rates: distinctRates(ramps.map((s) => Math.abs(s.event.rateKPerS))),
    temperatures: distinctTemperatures(scans.flatMap((s) => s.event.holdK ?? [])),
  };
}

/** Heating rates that differ by more than 2 %. */
export function distinctRates(rates: ArrayLike<number>): number[] {
  const out: number[] = [];
  for (const r of Float64Array.from(rates).sort()) if (out.length === 0 || r > out[out.length - 1] * 1.02) out.push(r);
  return out;
}
