import {
  calibrateFromStandards,
  findReferenceSubstance,
  type StandardObservation,
} from '../../jobs/calibration/index.ts';
import { reduceScan } from '../../jobs/reduction/index.ts';
import type { InstrumentCalibration } from '../../schema/wire/scan.ts';
import {
  METALS,
  type Random,
  rampProgramme,
  recordScan,
  samplingTimes,
  seededRandom,
  solveStandard,
} from './generator/index.ts';
import type { StudyOptions } from './registry.ts';
import { markdownTable, percent, quantile } from './table.ts';

/** Five rates, K/s (2 to 40 K/min), and the noise of one row ÷ height of the peak. */
const RATES = [2 / 60, 5 / 60, 10 / 60, 20 / 60, 40 / 60];
const NOISE = 0.003;
/** Scatter of the reported temperature from scan to scan, K, and of the contact, part of it. */
const SCATTER = { K: 0.02, contact: 0.05 };
const MASS_KG = 8e-6;

/**
 * Least standard error of the lag, s, that any unbiased estimate can have (Cramér–Rao) when only the scatter between scans and the spread
 * of the contact, evenly within ± its part, move the onsets: a + b(T − T̄) + τβ with known variances.
 */
export function leastLagError(contactS: number): number {
  const temperatures = ['In', 'Sn', 'Zn'].map((symbol) => METALS[symbol as keyof typeof METALS].meltingK);
  const middle = temperatures.reduce((a, b) => a + b, 0) / temperatures.length;
  // Information matrix of (τ, 1, T − T̄); its inverse's first element by the Schur complement.
  let [bb, b1, bT, one, oneT, TT] = [0, 0, 0, 0, 0, 0];
  for (const T of temperatures)
    for (const rate of RATES) {
      const weight = 1 / (SCATTER.K ** 2 + (SCATTER.contact * contactS * rate) ** 2 / 3);
      const d = T - middle;
      bb += weight * rate * rate;
      b1 += weight * rate;
      bT += weight * rate * d;
      one += weight;
      oneT += weight * d;
      TT += weight * d * d;
    }
  const determinant = one * TT - oneT * oneT;
  return 1 / Math.sqrt(bb - (b1 * b1 * TT - 2 * b1 * bT * oneT + bT * bT * one) / determinant);
}

export interface StandardsResult {
  calibration: InstrumentCalibration;
  offsetK: number;
  lagS: number;
  heatFactor: number;
  contactS: number;
}

/**
 * Indium, tin and zinc at five rates on one instrument drawn from `seed` and `index`; noise-free scans are solved once a drawn
 * instrument. The truth of the lag is shift + response: an onset is reported that much × rate late.
 */
export function calibrateSimulated(seed: string, index: number): StandardsResult {
  const random = seededRandom(`standards/${seed}/${index}`);
  const offsetK = random.between(-1.5, 1.5);
  const contactS = random.between(0.5, 1.5);
  const shiftS = contactS + random.between(0.3, 2);
  const responseS = random.between(0, 2);
  const heatFactor = random.between(0.9, 1.1);
  const observations: StandardObservation[] = [];
  for (const symbol of ['In', 'Sn', 'Zn'] as const) {
    for (const rate of RATES)
      observations.push(
        observe(symbol, rate, { offsetK, shiftS, responseS }, contactS, heatFactor, random.fork(`${symbol} ${rate}`)),
      );
  }
  const calibration = calibrateFromStandards('furnace', undefined, RATES[RATES.length - 1], observations);
  return { calibration, offsetK, lagS: shiftS + responseS, heatFactor, contactS };
}

function observe(
  symbol: 'In' | 'Sn' | 'Zn',
  rate: number,
  instrument: { offsetK: number; shiftS: number; responseS: number },
  contactS: number,
  heatFactor: number,
  random: Random,
): StandardObservation {
  const metal = METALS[symbol];
  const own = contactS * (1 + SCATTER.contact * random.between(-1, 1));
  const shifted = {
    ...instrument,
    shiftS: instrument.shiftS - contactS + own,
    offsetK: instrument.offsetK + SCATTER.K * random.normal(),
  };
  // Duration of melting at the edge's slope, ½ (β/contact) c_p t² = ΔH, sets the range and the sampling.
  const meltS = Math.sqrt((2 * metal.enthalpyJPerKg * own) / (metal.heatCapacityJPerKgK * rate));
  const reach = rate * (8 * meltS + 12 * (shifted.shiftS + shifted.responseS)) + 3;
  const programme = rampProgramme(metal.meltingK - reach, metal.meltingK + reach, rate);
  const rows = Math.min(6000, Math.max(800, Math.round((programme.endS / meltS) * 40)));
  const solved = solveStandard(metal, shifted, own, programme, MASS_KG, samplingTimes(0, programme.endS, rows));
  const recorded = recordScan(solved, shifted.offsetK, { noise: NOISE, drift: 0.02 }, random);
  const outcome = reduceScan(
    {
      timeS: recorded.timeS,
      temperatureK: recorded.temperatureK,
      heatFlow: recorded.heatFlowW.map((v) => v / heatFactor),
      heatFlowUnit: 'W',
      columns: [],
      dialect: 'simulated',
      flags: [],
    },
    {
      file: `${symbol}-${rate}`,
      sample: symbol,
      role: 'standard',
      exotherm: 'up',
      calibration: {
        instrument: 'furnace',
        kind: 'furnace',
        source: 'prior',
        offsetK: 0,
        offsetSeK: 1,
        lagS: 0,
        lagSeS: 1,
        standards: 0,
      },
    },
  );
  if (!outcome.ok || !outcome.reduced.standard) throw new Error(`${symbol} at ${rate} K/s gave no melting`);
  const substance = findReferenceSubstance(symbol);
  if (!substance) throw new Error(`${symbol} is in no list`);
  return { ...substance, melting: outcome.reduced.standard, massKg: MASS_KG, perMass: false };
}

export function standardsStudy({ count = 100, seed }: StudyOptions): string {
  const results = Array.from({ length: count }, (_, index) => calibrateSimulated(seed, index));
  const sigma = (c: InstrumentCalibration, i: number) => Math.sqrt(c.covariance?.[i * 4] ?? Number.NaN);
  const quantities = [
    {
      name: 'offset a at the mean temperature, K',
      error: (r: StandardsResult) => r.calibration.offsetK - r.offsetK,
      se: (r: StandardsResult) => sigma(r.calibration, 0),
      show: (v: number) => v.toFixed(3),
    },
    {
      name: 'lag τ, part of itself',
      error: (r: StandardsResult) => r.calibration.lagS / r.lagS - 1,
      se: (r: StandardsResult) => sigma(r.calibration, 1) / r.lagS,
      show: (v: number) => percent(v),
    },
    {
      name: 'heat factor, part of itself',
      error: (r: StandardsResult) => (r.calibration.heatFactor ?? Number.NaN) / r.heatFactor - 1,
      se: (r: StandardsResult) => (r.calibration.heatFactorSe ?? Number.NaN) / r.heatFactor,
      show: (v: number) => percent(v),
    },
  ];
  const rows = quantities.map(({ name, error, se, show }) => {
    const errors = results.map(error);
    const sizes = errors.map(Math.abs);
    const held = results.filter((r) => Math.abs(error(r)) <= 1.96 * se(r)).length;
    const bias = errors.reduce((a, b) => a + b, 0) / errors.length;
    return [name, show(bias), show(quantile(sizes, 0.5)), show(quantile(sizes, 0.95)), percent(held / count, 1)];
  });
  const squares = (of: (r: StandardsResult) => number) => results.reduce((sum, r) => sum + of(r) ** 2, 0) / count;
  const lagError = Math.sqrt(squares((r) => r.calibration.lagS - r.lagS));
  const least = Math.sqrt(squares((r) => leastLagError(r.contactS)));
  const leastPart = quantile(
    results.map((r) => leastLagError(r.contactS) / r.lagS),
    0.5,
  );
  return [
    `In, Sn and Zn at ${RATES.map((r) => (r * 60).toFixed(0)).join(', ')} K/min, ${count} instruments; ${SCATTER.K} K scatter from scan to scan, noise ${percent(NOISE, 1)}.`,
    markdownTable(
      ['quantity', 'mean error', 'median |error|', '95th percentile', '95 % interval holds the truth'],
      rows,
    ),
    `Lag: root mean square error ${lagError.toFixed(4)} s; the scatter and the contact alone allow no less than ${least.toFixed(4)} s (Cramér–Rao; median ${percent(leastPart)} of the lag), before any noise of the signal.`,
  ].join('\n\n');
}
