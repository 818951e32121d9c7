import type { FitScan } from '../../schema/wire/parameters.ts';
import { CONVERSION_GRID } from '../../schema/wire/reduced.ts';
import { GAS_CONSTANT } from '../../schema/wire/units.ts';

/** Exact JMAK curves on holds and cooling ramps, worked out here apart from the project's integrals. */

const head = (name: string, kind: 'hold' | 'cooling', rateKPerS: number) => ({
  file: name,
  sha256: name,
  segment: 1,
  instrument: 'furnace',
  event: {
    event: 1,
    kind,
    rateKPerS,
    peakErrorK: 0.1,
    area: 1,
    areaError: 0,
    usableFrom: 0.01,
    usableTo: 0.99,
    pointsOverWidth: 200,
    noiseFraction: 0,
  },
});

/**
 * A hold at T reached at 60 s after a ramp of 5 K/s from 200 K below; α starts `induction` × t½ later.
 * @param stretch factor on all times after the induction (a scatter of one scan)
 */
export function exactHold(
  energyJPerMol: number,
  lnPrefactor: number,
  exponent: number,
  temperatureK: number,
  induction: number,
  name: string,
  stretch = 1,
): FitScan {
  const K = Math.exp(lnPrefactor - energyJPerMol / (GAS_CONSTANT * temperatureK)) / stretch;
  const reached = 60;
  const start = reached + (induction * Math.LN2 ** (1 / exponent)) / K;
  const timeS = Float64Array.from(CONVERSION_GRID, (a) => start + (-Math.log1p(-a)) ** (1 / exponent) / K);
  const ratePerS = Float64Array.from(
    CONVERSION_GRID,
    (a) => exponent * K * (1 - a) * (-Math.log1p(-a)) ** ((exponent - 1) / exponent),
  );
  const before = Float64Array.from({ length: 50 }, (_, i) => 20 + ((timeS[0] - 20) * i) / 49);
  const at = (t: number) => Math.min(temperatureK, temperatureK - 5 * (reached - t));
  const { event, ...rest } = head(name, 'hold', 0);
  return {
    ...rest,
    event: {
      ...event,
      holdK: temperatureK,
      holdReachedS: reached,
      onsetK: temperatureK,
      peakK: temperatureK,
      endK: temperatureK,
      widthK: 1,
      centroidK: temperatureK,
      rampStartK: temperatureK - 200,
      curve: {
        timeS,
        temperatureK: new Float64Array(99).fill(temperatureK),
        ratePerS,
        baselineErrorK: new Float64Array(99),
        programmeTimeS: before,
        programmeTemperatureK: before.map(at),
      },
    },
  };
}

/** Cooling at |β| from `startK`; a negative energy is a rate that grows on cooling. Trapezoids of 1 mK, 1e-6 of ln α. */
export function exactCooling(
  energyJPerMol: number,
  lnPrefactor: number,
  exponent: number,
  coolingKPerS: number,
  startK: number,
  name: string,
  shiftK = 0,
): FitScan {
  const K = (T: number) => Math.exp(lnPrefactor - energyJPerMol / (GAS_CONSTANT * T));
  const targets = CONVERSION_GRID.map((a) => (-Math.log1p(-a)) ** (1 / exponent));
  const temperatureK = new Float64Array(99);
  const step = 1e-3;
  let sum = 0;
  let T = startK;
  for (let g = 0; g < 99; ) {
    const more = ((K(T) + K(T - step)) / 2) * (step / coolingKPerS);
    if (sum + more < targets[g]) {
      sum += more;
      T -= step;
      continue;
    }
    temperatureK[g] = T - (step * (targets[g] - sum)) / more;
    g++;
  }
  const time = (v: number) => (startK - v) / coolingKPerS;
  const ratePerS = Float64Array.from(
    CONVERSION_GRID,
    (a, g) => exponent * K(temperatureK[g]) * (1 - a) * (-Math.log1p(-a)) ** ((exponent - 1) / exponent),
  );
  const before = Float64Array.from({ length: 50 }, (_, i) => startK - ((startK - temperatureK[0]) * i) / 49);
  const { event, ...rest } = head(name, 'cooling', -coolingKPerS);
  return {
    ...rest,
    event: {
      ...event,
      onsetK: temperatureK[9] + shiftK,
      peakK: temperatureK[62] + shiftK,
      endK: temperatureK[89] + shiftK,
      widthK: temperatureK[19] - temperatureK[79],
      centroidK: temperatureK[55] + shiftK,
      rampStartK: startK,
      curve: {
        timeS: temperatureK.map(time),
        temperatureK: temperatureK.map((v) => v + shiftK),
        ratePerS,
        baselineErrorK: new Float64Array(99),
        programmeTimeS: before.map(time),
        programmeTemperatureK: before.map((v) => v + shiftK),
      },
    },
  };
}
