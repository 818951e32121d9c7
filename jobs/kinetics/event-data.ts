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
  const data: EventData = {
    ...emptyColumns(n),
    event,
    scans,
    instruments: used,
    instrument: new Uint16Array(n),
    baselineErrorK: new Float64Array(n * CONVERSION_COUNT),
    programmes: [],
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

/** Heating rates that differ by more than 2 %. */
export function distinctRates(rates: ArrayLike<number>): number[] {
  const out: number[] = [];
  for (const r of Float64Array.from(rates).sort()) if (out.length === 0 || r > out[out.length - 1] * 1.02) out.push(r);
  return out;
}
