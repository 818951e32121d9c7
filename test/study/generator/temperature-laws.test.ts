import { expect, test } from 'vitest';
import {
  arrheniusLaw,
  bentLaw,
  decoupledLaw,
  glassTransitionAtRate,
  log10Viscosity,
  R,
  type TemperatureLaw,
} from './temperature-laws.ts';

const former = { glassTransitionK: 480, fragility: 75, log10Infinity: -3 };
const laws: Record<string, TemperatureLaw> = {
  arrhenius: arrheniusLaw(180e3, 30),
  bent: bentLaw({ energyJPerMol: 250e3, bend: 1.2, centreK: 600, halfSpanPerK: 2e-4, lnKCentre: -3 }),
  'bent by nothing': bentLaw({ energyJPerMol: 250e3, bend: 0, centreK: 600, halfSpanPerK: 2e-4, lnKCentre: -3 }),
  decoupled: decoupledLaw(former, { decoupling: 0.7, anchorK: 520, lnKAnchor: -4 }),
  'decoupled with driving force': decoupledLaw(former, {
    decoupling: 0.7,
    anchorK: 520,
    lnKAnchor: -4,
    melting: { temperatureK: 820, enthalpyJPerMol: 12e3 },
  }),
};

test.each(Object.keys(laws))('%s: the local energy is −R d ln K/d(1/T)', (name) => {
  const law = laws[name];
  for (const temperatureK of [500, 560, 640]) {
    const h = 1e-7;
    const x = 1 / temperatureK;
    const slope = (law.lnK(1 / (x + h)) - law.lnK(1 / (x - h))) / (2 * h);
    expect((-R * slope) / law.localEnergy(temperatureK)).toBeCloseTo(1, 5);
  }
});

test('the bend is ln of the ratio of the local energies at both ends of its span', () => {
  const ends = [1 / (1 / 600 + 2e-4), 1 / (1 / 600 - 2e-4)].map((t) => laws.bent.localEnergy(t));
  expect(Math.log(ends[0] / ends[1])).toBeCloseTo(1.2, 12);
});

test('viscosity: 10^12 Pa s and the slope m at Tg, by definition of both', () => {
  expect(log10Viscosity(former, 480)).toBeCloseTo(12, 12);
  const h = 1e-6;
  const slope = (log10Viscosity(former, 480 / (1 + h)) - log10Viscosity(former, 480 / (1 - h))) / (2 * h);
  expect(slope).toBeCloseTo(75, 4);
});

test('the glass transition moves with rate by the energy that the fragility means (Moynihan 1974)', () => {
  const [low, high] = [0.99, 1.01].map((factor) => glassTransitionAtRate(former, (10 / 60) * factor));
  const energy = (-R * Math.log(1.01 / 0.99)) / (1 / high - 1 / low);
  expect(energy / (Math.LN10 * R * 480)).toBeCloseTo(75, 2);
  expect(glassTransitionAtRate(former, 10 / 60)).toBeCloseTo(480, 9);
});
