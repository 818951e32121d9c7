import { makeForecastSource } from '../../jobs/forecast/index.ts';
import { judgeCurvature } from '../../jobs/glass/index.ts';
import { createEstimator, measuredIntegrals, rampIntegrals } from '../../jobs/kinetics/estimate.ts';
import { collectEvent, distinctRates } from '../../jobs/kinetics/event-data.ts';
import { averageSegments, describeModelFree } from '../../jobs/kinetics/model-free.ts';
import { drawBuffer, drawColumns, modelScatter } from '../../jobs/kinetics/monte-carlo.ts';
import { createRandom } from '../../jobs/numeric/random.ts';
import { mean } from '../../jobs/numeric/statistics.ts';
import type { ForecastSource } from '../../schema/wire/forecasts.ts';
import type { FitScan } from '../../schema/wire/parameters.ts';
import type { InstrumentCalibration } from '../../schema/wire/scan.ts';
import type { Verdict } from '../../schema/wire/verdicts.ts';
import { arrheniusLawWithPeak, bentLaw, R, type Random, seededRandom, type TemperatureLaw } from './generator/index.ts';
import { exactEvent, fitScanOf } from './verdict-events.ts';

export type MaterialKind = 'straight' | 'bent' | 'bent-glass';

export interface ForecastCampaign {
  kind: MaterialKind;
  law: TemperatureLaw;
  exponent: number;
  /** Temperature where the glass begins, known to the product; below it the true law is Arrhenius (bent-glass) or none is needed */
  glassTransitionK?: number;
  lowK: number;
  highK: number;
  scans: FitScan[];
  instruments: InstrumentCalibration[];
  measure(instrument: string, rateKPerS: number, name: string): FitScan;
}

/** Scatter between scans, K; what calibration leaves of the offset, K. */
const SETUP = [
  {
    instrument: 'furnace-1',
    kind: 'furnace',
    scatterK: 0.2,
    offsetSeK: 0.1,
    lagS: 4,
    lagSeS: 0.2,
    low: 0.05,
    high: 5,
    rates: 5,
  },
  {
    instrument: 'chip-1',
    kind: 'chip',
    scatterK: 0.6,
    offsetSeK: 0.5,
    lagS: 4e-4,
    lagSeS: 4e-5,
    low: 10,
    high: 30000,
    rates: 6,
  },
] as const;

/** One campaign of two scans a rate on a furnace and, where wished, a chip; all true values kept. Same seed, same campaign. */
export function drawForecastCampaign(seed: string, kind: MaterialKind, chip = true): ForecastCampaign {
  const random = seededRandom(`forecast/${seed}/${kind}`);
  const exponent = random.between(1.5, 4);
  const peakK = random.between(400, 850);
  const { law, lowK, highK, glassTransitionK } = drawLaw(kind, peakK, exponent, random);
  const setups = chip ? SETUP : SETUP.slice(0, 1);
  const offsets = setups.map((s) => s.offsetSeK * random.normal());
  const lags = setups.map((s) => s.lagSeS * random.normal());
  const measure = (instrument: string, rateKPerS: number, name: string): FitScan => {
    const j = setups.findIndex((s) => s.instrument === instrument);
    const own = random.fork(name);
    const exact = exactEvent(law, exponent, rateKPerS, { offsetK: offsets[j], lagS: lags[j], responseShare: 0 });
    const errorK = 0.003 * exact.widthK;
    const shift = setups[j].scatterK * own.normal() + errorK * own.normal();
    return withWholeRamp(
      fitScanOf(exact, { file: name, instrument, rateKPerS, replicate: name }, shift, errorK),
      rateKPerS,
    );
  };
  const scans = setups.flatMap((s) =>
    Array.from({ length: s.rates }, (_, i) => s.low * (s.high / s.low) ** (i / (s.rates - 1))).flatMap((rate) =>
      [1, 2].map((r) => measure(s.instrument, rate, `${s.instrument}-${rate.toPrecision(4)}-${r}`)),
    ),
  );
  const instruments = setups.map(
    (s): InstrumentCalibration => ({
      instrument: s.instrument,
      kind: s.kind,
      source: 'standards',
      offsetK: 0,
      offsetSeK: s.offsetSeK,
      lagS: 0,
      lagSeS: s.lagSeS,
      responseS: 0,
      standards: 4,
    }),
  );
  return { kind, law, exponent, glassTransitionK, lowK, highK, scans, instruments, measure };
}

/** The ramp from where K is below e^−16 of its value in the event: integrals from the start of the programme miss nothing. */
function withWholeRamp(scan: FitScan, rateKPerS: number): FitScan {
  const curve = scan.event.curve!;
  const firstK = curve.temperatureK[0];
  const below = Math.min(0.6 * firstK, 12 * scan.event.widthK);
  const rows = 50;
  const programmeTemperatureK = Float64Array.from({ length: rows }, (_, i) => firstK - below * (1 - i / (rows - 1)));
  const programmeTimeS = programmeTemperatureK.map((T) => curve.timeS[0] + (T - firstK) / rateKPerS);
  return {
    ...scan,
    event: { ...scan.event, rampStartK: firstK - below, curve: { ...curve, programmeTimeS, programmeTemperatureK } },
  };
}

function drawLaw(kind: MaterialKind, peakK: number, exponent: number, random: Random) {
  const energy = R * peakK * random.between(30, 55);
  const centroid = (law: TemperatureLaw, rate: number) =>
    exactEvent(law, exponent, rate, { offsetK: 0, lagS: 0, responseShare: 0 }).centroidK;
  if (kind === 'straight') {
    const law = arrheniusLawWithPeak(energy, peakK, 0.2);
    return { law, lowK: centroid(law, 0.05), highK: centroid(law, 30000) };
  }
  const bend = random.between(0.3, 1.2);
  const centreK = 1.12 * peakK;
  let settings = { energyJPerMol: energy, bend, centreK, halfSpanPerK: 0.1 / peakK, lnKCentre: 0 };
  const place = () => {
    // At the fast end E/(R T) stays that of a real event.
    settings.energyJPerMol = Math.max(settings.energyJPerMol, 18 * R * centreK * Math.exp(bend / 2));
    settings.lnKCentre = Math.log((40 * settings.energyJPerMol) / (R * centreK ** 2));
    return bentLaw(settings);
  };
  let bent = place();
  // The bend is meant over the measured span: a few rounds make the two agree.
  for (let round = 0; round < 5; round++) {
    const halfSpanPerK = (1 / centroid(bent, 0.05) - 1 / centroid(bent, 30000)) / 2;
    settings = { ...settings, halfSpanPerK };
    bent = place();
  }
  const [lowK, highK] = [centroid(bent, 0.05), centroid(bent, 30000)];
  if (kind === 'bent') return { law: bent, lowK, highK, glassTransitionK: lowK - 100 };
  const Tg = lowK - random.between(10, 40);
  const [lnKg, Eg] = [bent.lnK(Tg), bent.localEnergy(Tg)];
  const law: TemperatureLaw = {
    lnK: (T) => (T >= Tg ? bent.lnK(T) : lnKg - (Eg / R) * (1 / T - 1 / Tg)),
    localEnergy: (T) => (T >= Tg ? bent.localEnergy(T) : Eg),
  };
  return { law, lowK, highK, glassTransitionK: Tg };
}

/** Draws of the model-free part: a twentieth of the time goes into the shared law's. */
const MODEL_FREE_DRAWS = 40;

/** What the product makes of a campaign: the verdict with its shared law, and the model-free description, each with draws. */
export function sourceOfCampaign(
  c: ForecastCampaign,
  seed: string,
  draws: number,
  withModelFree = true,
): { source: ForecastSource; verdict: Verdict } | undefined {
  const facts = c.glassTransitionK === undefined ? {} : { glassTransitionK: c.glassTransitionK };
  const { verdicts, events, sharedLaws } = judgeCurvature({
    sample: 'S',
    scans: c.scans,
    instruments: c.instruments,
    facts,
    seed,
    draws,
  });
  if (sharedLaws.length === 0) return undefined;
  const { verdict } = verdicts[0];
  const { law, draws: lawDraws } = sharedLaws[0];
  const { degreesOfFreedom } = events[0];
  const source = makeForecastSource({
    sample: 'S',
    event: 1,
    facts,
    shared: { law, draws: lawDraws, degreesOfFreedom, verdict },
    ...(withModelFree && { modelFree: modelFreeOf(c, seed, Math.min(draws, MODEL_FREE_DRAWS)) }),
  });
  return source && { source, verdict };
}

/** The model-free part as the fit of a sample makes it: Vyazovkin's E and the segments' integrals in the estimate and in every draw. */
export function modelFreeOf(c: Pick<ForecastCampaign, 'scans' | 'instruments'>, seed: string, draws: number) {
  const data = collectEvent(1, c.scans, c.instruments);
  const curves = Uint16Array.from(data.hasCurve.keys());
  const model = modelScatter(data, curves, distinctRates(data.rate).length);
  const curveWeights = Float64Array.from(curves, (i) => model.weights[i]);
  const x0 = mean(data.peakK.map((T) => 1 / T));
  const curveSigmaK = Float64Array.from(curves, (i) => model.sigmaK[data.instrument[i]]);
  const settings = {
    curves,
    weights: model.weights,
    curveWeights,
    curveSigmaK,
    augisBennett: false,
    curveMethods: true,
    x0,
  };
  const measured = measuredIntegrals(data, curves);
  const estimate = createEstimator(data, settings, measured)();
  const modelFree = describeModelFree(data, curves, curveWeights, measured, estimate.vyazovkin, x0);
  const columns = drawBuffer(data);
  const ramp = rampIntegrals(columns, curves);
  const estimator = createEstimator(columns, settings, ramp);
  const random = createRandom(`${seed}:curves`);
  const work = Array.from(curves, () => ({ value: 0, byEnergy: 0, byEnergy2: 0 }));
  const count = modelFree.conversions.length;
  const modelFreeDraws = { energyJPerMol: new Float64Array(draws * count), lnStep: new Float64Array(draws * count) };
  for (let d = 0; d < draws; d++) {
    drawColumns(model, random, columns);
    const drawn = estimator(estimate);
    modelFreeDraws.energyJPerMol.set(drawn.vyazovkin, d * count);
    modelFreeDraws.lnStep.set(averageSegments(ramp, curveWeights, drawn.vyazovkin, x0, work), d * count);
  }
  const peaks = Array.from(data.peakK);
  return {
    curve: modelFree,
    draws: modelFreeDraws,
    degreesOfFreedom: data.n - model.trendParameters,
    lowestK: Math.min(...peaks),
    highestK: Math.max(...peaks),
  };
}

export const trueLnTime = ({ law, exponent }: ForecastCampaign, conversion: number, T: number): number =>
  Math.log(-Math.log1p(-conversion)) / exponent - law.lnK(T);
