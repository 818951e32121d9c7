import type { FitScan } from '../../schema/wire/parameters.ts';
import type { InstrumentCalibration } from '../../schema/wire/scan.ts';
import type { JudgeInput } from '../../schema/wire/verdicts.ts';
import type { Random } from './generator/random.ts';
import {
  arrheniusLawWithPeak,
  bentLaw,
  decoupledLaw,
  type GlassFormer,
  glassTransitionAtRate,
  log10Viscosity,
  R,
  type TemperatureLaw,
} from './generator/temperature-laws.ts';
import { exactEvent, fitScanOf, roughTemperature, type TrueInstrument } from './verdict-events.ts';

export const LAG_CASES = ['right', 'wrong', 'negative', 'self-heating', 'unknown'] as const;
export type LagCase = (typeof LAG_CASES)[number];

/** A made-up material on a furnace and a chip, as characteristic temperatures; everything true is kept beside the input. */
export interface VerdictCampaign {
  kind: 'straight' | 'bent' | 'glass';
  lags: LagCase;
  bridged: boolean;
  replicates: number;
  law: TemperatureLaw;
  exponent: number;
  former?: GlassFormer;
  decoupling?: number;
  /** ln(E at the lowest true centroid / E at the highest) */
  trueBend: number;
  /** s, what calibration left in the temperatures, furnace and chip */
  netLagS: [number, number];
  input: JudgeInput;
  lowK: number;
  highK: number;
  /** one more scan of this material, as the same instrument would give it */
  measure(instrument: string, rateKPerS: number, replicate: string): FitScan;
}

export const INSTRUMENTS = ['furnace-1', 'chip-1'] as const;
const TEN_K_PER_MIN = 10 / 60;

export interface CampaignWish {
  kind?: VerdictCampaign['kind'];
  lags?: LagCase;
  bridged?: boolean;
  replicates?: number;
  /** scales the scatter between scans; 1 = 0.2 K furnace, 0.6 K chip */
  scatter?: number;
  instruments?: 'both' | 'furnace' | 'chip';
  /** share of the event's height */
  noise?: number;
  bend?: number;
  fragility?: number;
  lagFactor?: number;
  /** samples.csv leaves the enthalpy of melting out */
  meltingUnknown?: boolean;
}

/** Draws one campaign; `wish` fixes what a test wants fixed. Same random stream, same campaign. */
export function drawCampaign(random: Random, seed: string, wish: CampaignWish = {}): VerdictCampaign {
  const kind = wish.kind ?? random.pick(['straight', 'straight', 'bent', 'glass'] as const);
  const lags = wish.lags ?? random.pick(LAG_CASES);
  const bridged = wish.bridged ?? random.uniform() < 0.5;
  const replicates = wish.replicates ?? 1 + random.integer(3);
  const exponent = random.between(1, 4);
  const tg = random.between(350, 800);
  const material = drawMaterial(kind, tg, random, wish);
  const rates: [number[], number[]] = [logSteps(0.05, bridged ? 8 : 5, 5), logSteps(bridged ? 8 : 50, 30000, 6)];
  const noise = wish.noise ?? random.betweenLog(0.003, 0.02);
  const spread = wish.scatter ?? random.between(0.5, 1.5);
  const scatterK = [0.2 * spread, 0.6 * spread];
  const response = random.pick([0, 0.5, 1]);
  // The chip's lag is such that its fastest scan is moved by 3 to 30 K.
  const trueLag = [random.between(2, 8), random.betweenLog(1e-4, 1e-3)];
  const factor = wish.lagFactor ?? random.betweenLog(2, 10);
  const known = lags !== 'unknown';
  const instruments: InstrumentCalibration[] = [];
  const truth: TrueInstrument[] = [];
  const net: [number, number] = [0, 0];
  INSTRUMENTS.forEach((instrument, j) => {
    const chip = j === 1;
    const offsetSeK = known ? (chip ? 0.5 : 0.1) : chip ? 1 : 0.5;
    const wrong = lags === 'wrong' && (chip || random.uniform() < 0.3);
    const lagS = !known
      ? 0
      : wrong
        ? random.uniform() < 0.75
          ? trueLag[j] / factor
          : trueLag[j] * Math.min(factor, 3)
        : trueLag[j];
    const lagSeS = known ? 0.05 * lagS : chip ? 0.3e-3 : 3;
    // A file that was corrected before it came has no lag left; self-heating makes the sample lead its sensor.
    const actual = lags === 'negative' ? 0 : lags === 'self-heating' ? -0.4 * trueLag[j] : trueLag[j];
    const stated =
      lags === 'negative'
        ? lagS
        : lags === 'self-heating'
          ? 0
          : lagS * (known && !wrong ? 1 + 0.05 * random.normal() : 1);
    truth.push({ offsetK: offsetSeK * random.normal(), lagS: actual, responseShare: actual > 0 ? response : 0 });
    net[j] = actual - stated;
    instruments.push({
      instrument,
      kind: chip ? 'chip' : 'furnace',
      source: known ? 'standards' : 'prior',
      offsetK: 0,
      offsetSeK,
      lagS: stated,
      lagSeS: lags === 'self-heating' ? 0.1 * trueLag[j] : lagSeS,
      standards: known ? 4 : 0,
    });
  });
  const measure = (instrument: string, rateKPerS: number, replicate: string): FitScan => {
    const j = INSTRUMENTS.indexOf(instrument as (typeof INSTRUMENTS)[number]);
    const exact = exactEvent(material.law, exponent, rateKPerS, truth[j], material.fastestK);
    const own = 0.5 * noise * exact.widthK;
    const shift = scatterK[j] * random.normal() + own * random.normal() - instruments[j].lagS * rateKPerS;
    const file = `${instrument}-${rateKPerS.toPrecision(4)}-${replicate}`;
    return fitScanOf(exact, { file, instrument, rateKPerS, replicate }, shift, own);
  };
  const used = wish.instruments === 'furnace' ? [0] : wish.instruments === 'chip' ? [1] : [0, 1];
  const scans = used.flatMap((j) =>
    rates[j].flatMap((rate) =>
      Array.from({ length: replicates }, (_, r) => measure(INSTRUMENTS[j], rate, String(r + 1))),
    ),
  );
  const ideal = (rate: number) =>
    exactEvent(material.law, exponent, rate, { offsetK: 0, lagS: 0, responseShare: 0 }, material.fastestK);
  const lowK = ideal(rates[used[0]][0]).centroidK;
  const highK = ideal(rates[used[used.length - 1]].at(-1)!).centroidK;
  return {
    kind,
    lags,
    bridged,
    replicates,
    exponent,
    ...material,
    trueBend: Math.log(material.law.localEnergy(lowK) / material.law.localEnergy(highK)),
    netLagS: net,
    lowK,
    highK,
    measure,
    input: {
      sample: 'S',
      scans,
      instruments: used.map((j) => instruments[j]),
      facts: wish.meltingUnknown ? { ...material.facts, meltingEnthalpyJPerKg: undefined } : material.facts,
      seed,
      draws: 400,
    },
  };
}

const logSteps = (low: number, high: number, count: number): number[] =>
  Array.from({ length: count }, (_, k) => low * (high / low) ** (k / (count - 1)));

function drawMaterial(kind: VerdictCampaign['kind'], tg: number, random: Random, wish: CampaignWish) {
  if (kind === 'glass') {
    for (;;) {
      const material = drawGlass(tg, random, wish);
      if (crystallises(material.law, material.fastestK)) return material;
    }
  }
  const peakK = tg * random.between(1.04, 1.15);
  const energy = R * peakK * random.between(30, 60);
  if (kind === 'straight')
    return { law: arrheniusLawWithPeak(energy, peakK, TEN_K_PER_MIN), facts: {}, fastestK: 4000 };
  const bend = wish.bend ?? random.betweenLog(0.05, 2.3);
  // The wished bend is meant over 0.05 to 30 000 K/s: u has to be ±1 there; and however large, E/(R T) stays that of a real event (≥ 15).
  let settings = { energyJPerMol: energy, bend, centreK: 1.12 * peakK, halfSpanPerK: 0.05 / peakK, lnKCentre: 0 };
  const place = (): TemperatureLaw => {
    settings.lnKCentre = Math.log((40 * settings.energyJPerMol) / (R * settings.centreK ** 2));
    return bentLaw(settings);
  };
  let law = place();
  for (let i = 0; i < 60; i++) {
    const [low, high] = [0.05, 30000].map((rate) => roughTemperature(law, rate, 1, 4000));
    settings = {
      ...settings,
      halfSpanPerK: Math.sqrt(settings.halfSpanPerK * ((1 / low - 1 / high) / 2)),
      energyJPerMol: Math.max(settings.energyJPerMol, 15 * R * high * Math.exp(bend / 2)),
    };
    law = place();
  }
  return { law, facts: {}, fastestK: 4000 };
}

/** The fastest chip scan still crystallises well below the melt, in an event of its usual shape. */
function crystallises(law: TemperatureLaw, fastestK: number): boolean {
  const T = roughTemperature(law, 30000, 20, fastestK);
  return T < 0.98 * fastestK && law.localEnergy(T) > 12 * R * T;
}

/** A liquid whose crystals grow as its viscosity to the power −ξ with a driving force, and what the sheets say of it. */
function drawGlass(tg: number, random: Random, wish: CampaignWish) {
  const peakK = tg * random.between(1.04, 1.15);
  const former = { glassTransitionK: tg, fragility: wish.fragility ?? random.between(30, 120), log10Infinity: -2.93 };
  const decoupling = random.between(0.5, 1);
  const meltingK = tg / random.between(0.55, 0.65);
  const meltingEntropy = random.between(8, 20);
  const melting = { temperatureK: meltingK, enthalpyJPerMol: meltingEntropy * meltingK };
  const shape = decoupledLaw(former, { decoupling, anchorK: peakK, lnKAnchor: 0, melting });
  const lnKAnchor = Math.log((TEN_K_PER_MIN * shape.localEnergy(peakK)) / (R * peakK ** 2));
  const molarMassKgPerMol = random.between(0.05, 0.12);
  // K passes its maximum where the driving force's fall outweighs the mobility's rise.
  let fastestK = meltingK;
  while (!(shape.localEnergy(fastestK) > 2e4)) fastestK -= 0.002 * meltingK;
  return {
    fastestK,
    former,
    decoupling,
    law: decoupledLaw(former, { decoupling, anchorK: peakK, lnKAnchor, melting }),
    facts: {
      meltingK,
      meltingEnthalpyJPerKg: melting.enthalpyJPerMol / molarMassKgPerMol,
      molarMassKgPerMol,
      cooledAtHeatingRate: true,
      viscosity: [0.95, 1, 1.05, 1.1, 1.2, 1.3, 1.5, 1.8].map((f) => ({
        temperatureK: f * tg,
        log10PaS: log10Viscosity(former, f * tg) + 0.05 * random.normal(),
      })),
      glassTransitions: [0.05, 0.16, 0.5, 1.6, 5].map((rateKPerS) => ({
        file: `tg-${rateKPerS}`,
        instrument: INSTRUMENTS[0],
        rateKPerS,
        temperatureK: glassTransitionAtRate(former, rateKPerS) + 0.1 * random.normal(),
      })),
    },
  };
}
