import type { FitScan } from '../../schema/wire/parameters.ts';

/** Scans that are rows of a table of temperatures: no curve, no width, no ramp start. Rates K/min, temperatures K, 0.5 K of error. */
export function peakTable(perMinute: number[], peakK: number[], onsetK: number[] = [], file = 'row'): FitScan[] {
  return perMinute.map((b, i) => ({
    file: `${file}-${i + 1}`,
    sha256: `${file}-${i + 1}`,
    segment: 1,
    instrument: 'furnace',
    event: {
      event: 1,
      kind: 'heating',
      rateKPerS: b / 60,
      onsetK: onsetK[i] ?? Number.NaN,
      peakK: peakK[i],
      endK: Number.NaN,
      widthK: Number.NaN,
      centroidK: Number.NaN,
      peakErrorK: 0.5,
      area: Number.NaN,
      areaError: Number.NaN,
      usableFrom: 0.01,
      usableTo: 0.99,
      pointsOverWidth: 0,
      noiseFraction: 0,
      rampStartK: Number.NaN,
    },
  }));
}
