import type { FitScan } from '../../schema/wire/parameters.ts';
import { CONVERSION_GRID } from '../../schema/wire/reduced.ts';
import { GAS_CONSTANT } from '../../schema/wire/units.ts';
import { exactScan } from './exact-curves.ts';

/** A1 = 1e10 and A2 = 1e15 1/min, E1 = 80 and E2 = 120 kJ/mol, equal weights: kinetics of the ICTAC project, Thermochim. Acta 355 (2000) 125. */
const STEPS = [
  { a: 1e10 / 60, c: 80e3 / GAS_CONSTANT },
  { a: 1e15 / 60, c: 120e3 / GAS_CONSTANT },
];
const START_K = 200;
const PANEL_K = 1;
const NODES = [-Math.sqrt(0.6), 0, Math.sqrt(0.6)];
const NODE_WEIGHTS = [5 / 18, 8 / 18, 5 / 18];

/** Exact curves of two parallel first-order reactions on a ramp; ∫K dT by Gauss–Legendre panels of 1 K, apart from the project's integrals. */
export function parallelScan(rateKPerS: number, name: string): FitScan {
  const integral = ({ a, c }: (typeof STEPS)[number], from: number, to: number) =>
    (a / rateKPerS) *
    (to - from) *
    NODES.reduce((s, x, q) => s + NODE_WEIGHTS[q] * Math.exp(-c / ((from + to) / 2 + ((to - from) / 2) * x)), 0);
  const sums = [0, 0];
  let panel = START_K;
  const temperatureK = new Float64Array(99);
  const ratePerS = new Float64Array(99);
  const left = (T: number) => STEPS.map((s, i) => Math.exp(-(sums[i] + integral(s, panel, T))));
  const alpha = (T: number) => 1 - (left(T)[0] + left(T)[1]) / 2;
  CONVERSION_GRID.forEach((target, g) => {
    while (alpha(panel + PANEL_K) < target) {
      STEPS.forEach((s, i) => {
        sums[i] += integral(s, panel, panel + PANEL_K);
      });
      panel += PANEL_K;
    }
    let [low, high] = [panel, panel + PANEL_K];
    for (let i = 0; i < 60; i++) {
      const mid = (low + high) / 2;
      if (alpha(mid) < target) low = mid;
      else high = mid;
    }
    temperatureK[g] = low;
    ratePerS[g] = STEPS.reduce((s, { a, c }, i) => s + 0.5 * a * Math.exp(-c / low) * left(low)[i], 0);
  });
  // The shell of a scan from the single-step curves; everything that follows from α is replaced.
  const shell = exactScan(120e3, 33, 1, rateKPerS, START_K, name);
  const top = ratePerS.indexOf(Math.max(...ratePerS));
  const before = Float64Array.from({ length: 50 }, (_, i) => START_K + ((temperatureK[0] - START_K) * i) / 49);
  const time = (T: number) => (T - START_K) / rateKPerS;
  return {
    ...shell,
    event: {
      ...shell.event,
      peakK: temperatureK[top],
      widthK: temperatureK[84] - temperatureK[14],
      onsetK: temperatureK[4],
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
