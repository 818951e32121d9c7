import type { FitScan } from '../../schema/wire/parameters.ts';
import { CONVERSION_GRID } from '../../schema/wire/reduced.ts';
import type { InstrumentCalibration } from '../../schema/wire/scan.ts';
import { GAS_CONSTANT } from '../../schema/wire/units.ts';

/** The instrument of the exact scans: no lag, known to 0.5 s and 0.1 K. */
export const furnace: InstrumentCalibration = {
  instrument: 'furnace',
  kind: 'furnace',
  source: 'sheet',
  offsetK: 0,
  offsetSeK: 0.1,
  lagS: 0,
  lagSeS: 0.5,
  responseS: 0,
  standards: 0,
};

/**
 * Exact JMAK curves on a ramp, worked out here apart from the project's integrals: ∫K dt by Gauss–Legendre panels of a few kelvin from far below,
 * T(α) by bisection to 1e-9 K.
 */
export function exactScan(
  energyJPerMol: number,
  lnPrefactor: number,
  exponent: number,
  rateKPerS: number,
  startK: number,
  name: string,
  shiftK = 0,
): FitScan {
  const K = (T: number) => Math.exp(lnPrefactor - energyJPerMol / (GAS_CONSTANT * T));
  const integral = (to: number) => {
    const panels = Math.max(40, Math.ceil((to - startK) / 2));
    const h = (to - startK) / panels;
    const nodes = [-Math.sqrt(0.6), 0, Math.sqrt(0.6)];
    const weights = [5 / 9, 8 / 9, 5 / 9];
    let sum = 0;
    for (let p = 0; p < panels; p++) {
      for (let k = 0; k < 3; k++) sum += weights[k] * K(startK + h * (p + 0.5 + nodes[k] / 2));
    }
    return (sum * h) / 2 / rateKPerS;
  };
  const temperatureAt = (alpha: number) => {
    const target = (-Math.log(1 - alpha)) ** (1 / exponent);
    let low = startK;
    let high = startK + 1500;
    while (high - low > 1e-9) {
      const mid = (low + high) / 2;
      if (integral(mid) < target) low = mid;
      else high = mid;
    }
    return (low + high) / 2;
  };
  const temperatures = Float64Array.from(CONVERSION_GRID, temperatureAt);
  const rates = temperatures.map((T, k) => {
    const x = -Math.log(1 - CONVERSION_GRID[k]);
    return exponent * K(T) * (1 - CONVERSION_GRID[k]) * x ** ((exponent - 1) / exponent);
  });
  const time = temperatures.map((T) => (T - startK) / rateKPerS);
  const programmeT = Float64Array.from({ length: 50 }, (_, k) => startK + ((temperatures[0] - startK) * k) / 49);
  let peak = temperatures[0];
  {
    // d²α/dt² = 0 by golden section on the rate.
    const rate = (T: number) => {
      const I = integral(T);
      return K(T) * I ** (exponent - 1) * Math.exp(-(I ** exponent));
    };
    let [a, b] = [temperatures[0], temperatures[98]];
    const g = (Math.sqrt(5) - 1) / 2;
    while (b - a > 1e-6) {
      const [c, d] = [b - g * (b - a), a + g * (b - a)];
      if (rate(c) > rate(d)) b = d;
      else a = c;
    }
    peak = (a + b) / 2;
  }
  return {
    file: name,
    sha256: name,
    segment: 1,
    instrument: 'furnace',
    event: {
      event: 1,
      kind: 'heating',
      rateKPerS,
      onsetK: temperatures[9] + shiftK,
      peakK: peak + shiftK,
      endK: temperatures[89] + shiftK,
      widthK: temperatures[79] - temperatures[19],
      centroidK: peak + shiftK,
      peakErrorK: 0,
      area: 1,
      areaError: 0,
      usableFrom: 0.01,
      usableTo: 0.99,
      pointsOverWidth: 200,
      noiseFraction: 0,
      rampStartK: startK + shiftK,
      curve: {
        timeS: time,
        temperatureK: temperatures.map((T) => T + shiftK),
        ratePerS: rates,
        baselineErrorK: new Float64Array(99),
        programmeTimeS: programmeT.map((T) => (T - startK) / rateKPerS),
        programmeTemperatureK: programmeT.map((T) => T + shiftK),
      },
    },
  };
}
