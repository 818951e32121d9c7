import type { PlotCurve } from '../../schema/wire/verdicts.ts';
import { log10GrowthRate } from './decoupling.ts';
import { localEnergyBand } from './rows.ts';
import { lnRateOf } from './shared-law-values.ts';
import type { BendAnalysis } from './verdict/analyse.ts';
import type { JudgedEvent } from './verdict/collect.ts';
import type { ConditionValue } from './verdict/condition.ts';
import type { SharedFit } from './verdict/shared-law.ts';
import { log10Viscosity, type ViscosityLaw } from './viscosity.ts';

const POINTS = 60;
const LAW_NAMES = {
  A: 'straight, lags as calibrated',
  L: 'straight, lags free',
  G: 'bent, lags as calibrated',
  GL: 'bent, lags free',
} as const;

const evenly = (from: number, to: number, count = POINTS): number[] =>
  Array.from({ length: count }, (_, k) => from + ((to - from) * k) / (count - 1));

/** ln(β/T²) against 1000/T: points with offset and lag of the bent law taken out, and the material's line under each of the four laws. */
export function kissingerPlot(judged: JudgedEvent, a: BendAnalysis): PlotCurve {
  const { data: d, full, laws } = a;
  const points = judged.instruments.map((c, j) => {
    const x: number[] = [];
    const y: number[] = [];
    for (let i = 0; i < d.n; i++) {
      if (d.instrument[i] !== j) continue;
      const T = d.temperatureK[i] - full.offsetK[j] - full.lagS[j] * d.rate[i];
      x.push(1000 / T);
      y.push(Math.log(d.rate[i] / (T * T)));
    }
    return { name: c.instrument, instrument: c.instrument, x, y };
  });
  const lnRates = evenly(Math.log(Math.min(...d.rate)), Math.log(Math.max(...d.rate)));
  const at: ConditionValue = { value: 0, byTemperature: 0, byLogEnergy: 0, byBend: 0 };
  const lines = (Object.keys(LAW_NAMES) as (keyof typeof LAW_NAMES)[]).map((name) => {
    const { lnK0, lnEnergy, q } = laws[name];
    let T = d.temperatureK[0];
    const temperatures = lnRates.map((v) => {
      T = d.condition.solve(v, T, lnK0, lnEnergy, q, d.scale, at);
      return T;
    });
    return {
      name: LAW_NAMES[name],
      x: temperatures.map((t) => 1000 / t),
      y: temperatures.map((t, k) => lnRates[k] - 2 * Math.log(t)),
    };
  });
  return {
    kind: 'kissinger',
    x: { quantity: '1000/T', unit: '1/K' },
    y: { quantity: 'ln(β/T²)', unit: 'ln(1/(K s))' },
    series: [...points, ...lines],
  };
}

/** Local activation energy against temperature with its 95 % band from the draws. */
export function energyPlot(shared: SharedFit, t: number): PlotCurve {
  const { law } = shared;
  const x = evenly(law.lowestMeasuredK, law.highestMeasuredK, 30);
  const bands = x.map((T) => localEnergyBand(shared, t, T));
  return {
    kind: 'energy',
    x: { quantity: 'temperature', unit: 'K' },
    y: { quantity: 'local activation energy', unit: 'kJ/mol' },
    series: [
      {
        name: 'shared law',
        x,
        y: bands.map((b) => b.value),
        lower: bands.map((b) => b.lower),
        upper: bands.map((b) => b.upper),
      },
    ],
  };
}

/** log10 of the growth rate (of K where no growth rate anchors it) against log10 η, with slope −1 for reference. */
export function growthPlot(
  judged: JudgedEvent,
  { law, trueK, fit }: SharedFit,
  viscosity: ViscosityLaw,
  anchor: { temperatureK: number; rateMPerS: number } | undefined,
): PlotCurve {
  const value = (T: number): number => (anchor ? log10GrowthRate(law, anchor, T) : lnRateOf(law, T) / Math.LN10);
  const temperatures = evenly(law.lowestMeasuredK, law.highestMeasuredK);
  const x = temperatures.map((T) => log10Viscosity(viscosity, T));
  const y = temperatures.map(value);
  const last = x.length - 1;
  return {
    kind: 'growth',
    x: { quantity: 'log10 viscosity', unit: 'Pa s' },
    y: anchor ? { quantity: 'log10 growth rate', unit: 'm/s' } : { quantity: 'log10 K', unit: '1/s' },
    series: [
      // A scan sits where its own temperature puts the viscosity, at the rate constant the law needs for its heating rate.
      ...judged.instruments.map((c) => {
        const own = judged.scans.flatMap((s, i) => (s.instrument === c.instrument ? [i] : []));
        return {
          name: c.instrument,
          instrument: c.instrument,
          x: own.map((i) => log10Viscosity(viscosity, trueK[i] + fit.residualK[i])),
          y: own.map((i) => value(trueK[i])),
        };
      }),
      { name: 'shared law', x, y },
      { name: 'slope −1', x: [x[0], x[last]], y: [y[last] - (x[0] - x[last]), y[last]] },
    ],
  };
}

/** log10 η against Tg/T: rows of the table and the laws fitted to them. */
export function viscosityPlot(
  laws: readonly ViscosityLaw[],
  table: readonly { temperatureK: number; log10PaS: number }[],
  glassTransitionK: number,
  highestK: number,
): PlotCurve {
  const top = Math.max(highestK, ...table.map((r) => r.temperatureK));
  const ratios = evenly(1.02, glassTransitionK / top);
  return {
    kind: 'viscosity',
    x: { quantity: 'Tg/T', unit: '1' },
    y: { quantity: 'log10 viscosity', unit: 'Pa s' },
    series: [
      ...(table.length > 0
        ? [{ name: 'table', x: table.map((r) => glassTransitionK / r.temperatureK), y: table.map((r) => r.log10PaS) }]
        : []),
      ...laws.map((law) => ({
        name: law.kind === 'vft' ? 'VFT' : 'MYEGA',
        x: ratios,
        y: ratios.map((r) => log10Viscosity(law, glassTransitionK / r)),
      })),
    ],
  };
}
