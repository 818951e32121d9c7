import type { FitScan } from '../../schema/wire/parameters.ts';
import { CONVERSION_GRID } from '../../schema/wire/reduced.ts';
import { GAS_CONSTANT } from '../../schema/wire/units.ts';
import { exactScan } from './exact-curves.ts';

const NODES = [-Math.sqrt(0.6), 0, Math.sqrt(0.6)];
const WEIGHTS = [5 / 18, 8 / 18, 5 / 18];
const gauss = (f: (x: number) => number, a: number, b: number, panels: number): number => {
  const h = (b - a) / panels;
  let sum = 0;
  for (let p = 0; p < panels; p++) {
    for (let q = 0; q < 3; q++) sum += WEIGHTS[q] * f(a + h * (p + 0.5 + NODES[q] / 2));
  }
  return sum * h;
};

/** Exact curve of dα/dt = A e^(−E/RT) α^M (1−α)^N on a ramp (M < 1), worked out apart from the project's integrals. */
export function sestakBerggrenScan(
  energy: number,
  lnA: number,
  m: number,
  n: number,
  rateKPerS: number,
  name: string,
): FitScan {
  const start = 400;
  // With α = u^(1/(1−M)) the integrand of g(α) = ∫ dα/f is smooth at 0.
  const g = (a: number) => gauss((u) => (1 - u ** (1 / (1 - m))) ** -n / (1 - m), 0, a ** (1 - m), 60);
  const K = (T: number) => Math.exp(lnA - energy / (GAS_CONSTANT * T));
  const temperatureK = Float64Array.from(CONVERSION_GRID, (a) => {
    const target = g(a);
    let [low, high] = [start, start + 900];
    while (high - low > 1e-8) {
      const mid = (low + high) / 2;
      if (gauss(K, start, mid, 150) / rateKPerS < target) low = mid;
      else high = mid;
    }
    return low;
  });
  const ratePerS = Float64Array.from(CONVERSION_GRID, (a, k) => K(temperatureK[k]) * a ** m * (1 - a) ** n);
  return withCurve(exactScan(energy, lnA, 2, rateKPerS, start, name), temperatureK, ratePerS, start, rateKPerS);
}

/** The same scan with another curve; peak and width from it. */
function withCurve(
  shell: FitScan,
  temperatureK: Float64Array,
  ratePerS: Float64Array,
  start: number,
  rateKPerS: number,
): FitScan {
  const time = (T: number) => (T - start) / rateKPerS;
  const before = Float64Array.from({ length: 50 }, (_, i) => start + ((temperatureK[0] - start) * i) / 49);
  const top = ratePerS.indexOf(Math.max(...ratePerS));
  return {
    ...shell,
    event: {
      ...shell.event,
      peakK: temperatureK[top],
      widthK: temperatureK[84] - temperatureK[14],
      curve: {
        timeS: temperatureK.map(time),
        temperatureK,
        ratePerS,
        baselineErrorK: new Float64Array(99),
        programmeTimeS: before.map(time),
        programmeTemperatureK: before,
      },
    },
  };
}

/**
 * A JMAK scan as an instrument with a first-order response of `lagS` records it, τ y′ + y = dα/dt, and as a reduction leaves it that does
 * not know the response: T moved down by the whole τ β.
 */
export function smearedScan(
  energy: number,
  lnA: number,
  n: number,
  rateKPerS: number,
  lagS: number,
  name: string,
): FitScan {
  const start = 400;
  const K = (T: number) => Math.exp(lnA - energy / (GAS_CONSTANT * T));
  const plain = exactScan(energy, lnA, n, rateKPerS, start, name);
  const step = 0.002;
  const at: number[] = [];
  const rates: number[] = [];
  let [T, sum, y, alpha, truth, g] = [start, 0, 0, 0, 0, 0];
  while (g < 99) {
    const dt = step / rateKPerS;
    sum += ((K(T) + K(T + step)) / 2) * dt;
    T += step;
    const next = 1 - Math.exp(-(sum ** n));
    // The area of the signal lags by τ y: ∫ y dt = α − τ y, solved for y at the end of the step.
    const y2 = (y * (lagS - dt / 2) + (next - truth)) / (lagS + dt / 2);
    const alpha2 = alpha + ((y + y2) / 2) * dt;
    while (g < 99 && alpha2 >= CONVERSION_GRID[g]) {
      const f = (CONVERSION_GRID[g] - alpha) / (alpha2 - alpha);
      at.push(T - step + f * step - lagS * rateKPerS);
      rates.push(y + f * (y2 - y));
      g++;
    }
    [y, alpha, truth] = [y2, alpha2, next];
  }
  return withCurve(plain, Float64Array.from(at), Float64Array.from(rates), start, rateKPerS);
}
