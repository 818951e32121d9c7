import { describe, expect, test } from 'vitest';
import { Condition, type ConditionValue } from '../../jobs/glass/verdict/condition.ts';
import { bentLaw, decoupledLaw } from '../study/generator/temperature-laws.ts';
import { exactEvent } from '../study/verdict-events.ts';

const at: ConditionValue = { value: 0, byTemperature: 0, byLogEnergy: 0, byBend: 0 };
const R = 8.31446261815324;

// Exact JMAK peaks, E = 200 kJ/mol, K0 = 1e14 1/s, n = 3, mpmath at 40 digits (reference set B5, exact JMAK over wide rates).
test.each([
  [5 / 60, 641.203923806],
  [10, 729.390323442],
  [1000, 839.656485643],
  [50000, 962.164076051],
])('straight law: the peak at %d K/s is that of the exact solution', (rate, peakK) => {
  const scale = { x0: 1 / 750, dx: 2e-4 };
  const lnK0 = Math.log(1e14) - 200e3 / (R * 750);
  const T = new Condition('peak', 3).solve(Math.log(rate), 700, lnK0, Math.log(200e3), 0, scale, at);
  expect(Math.abs(T - peakK)).toBeLessThan(2e-3);
});

describe('bent law: centroid, peak and T at α = 0.5 against the generator’s integration', () => {
  // test/study/generator writes its laws out on its own; X by Simpson's rule on 1200 steps.
  for (const bend of [-0.5, 0.3, 1, 2]) {
    for (const n of [1.5, 3]) {
      test(`bend ${bend}, n = ${n}`, () => {
        const law = { energyJPerMol: 260e3, bend, centreK: 600, halfSpanPerK: 2.2e-4, lnKCentre: Math.log(5) };
        const scale = { x0: 1 / 600, dx: 2.2e-4 };
        for (const rate of [0.1, 30, 10000]) {
          const exact = exactEvent(bentLaw(law), n, rate, { offsetK: 0, lagS: 0, responseShare: 0 });
          const truth = { centroid: exact.centroidK, peak: exact.peakK, half: exact.temperatureK[49] };
          for (const what of ['centroid', 'peak', 'half'] as const) {
            const c = new Condition(what, n);
            const T = c.solve(Math.log(rate), 600, law.lnKCentre, Math.log(law.energyJPerMol), bend / 2, scale, at);
            // A part of the width: what is left of higher orders for a bend of e² within one event's reach.
            expect(Math.abs(T - truth[what]) / exact.widthK).toBeLessThan(Math.abs(bend) < 2 ? 0.01 : 0.02);
          }
        }
      });
    }
  }
});

// An Arrhenius mobility (the generator's MYEGA law with m = 12 − log10 η∞) under a driving force that takes a third off the local energy.
test.each([1.5, 3])('with a driving force near melting: the three temperatures of the generator, n = %d', (n) => {
  const former = { glassTransitionK: 500, fragility: 14.93, log10Infinity: -2.93 };
  const melting = { temperatureK: 850, enthalpyJPerMol: 10_000 };
  const law = decoupledLaw(former, { decoupling: 0.9, anchorK: 550, lnKAnchor: -3, melting });
  const mobility = 0.9 * Math.LN10 * 14.93 * R * 500;
  const scale = { x0: 1 / 600, dx: 2.5e-4 };
  for (const rate of [0.1, 10, 1000]) {
    const exact = exactEvent(law, n, rate, { offsetK: 0, lagS: 0, responseShare: 0 }, 840);
    const truth = { centroid: exact.centroidK, peak: exact.peakK, half: exact.temperatureK[49] };
    for (const what of ['centroid', 'peak', 'half'] as const) {
      const c = new Condition(what, n, melting);
      const T = c.solve(Math.log(rate), 600, law.lnK(600), Math.log(mobility), 0, scale, at);
      expect(Math.abs(T - truth[what]) / exact.widthK).toBeLessThan(0.01);
    }
  }
  expect(law.localEnergy(730) / mobility).toBeLessThan(0.72);
});

test('a lag moves the centroid by exactly lag × rate, whatever part of it is a response', () => {
  const law = bentLaw({ energyJPerMol: 260e3, bend: 0.5, centreK: 600, halfSpanPerK: 2e-4, lnKCentre: 0 });
  const ideal = exactEvent(law, 3, 1000, { offsetK: 0, lagS: 0, responseShare: 0 });
  for (const responseShare of [0, 0.5, 1]) {
    const lagging = exactEvent(law, 3, 1000, { offsetK: 0, lagS: 5e-3, responseShare });
    expect(lagging.centroidK - ideal.centroidK).toBeCloseTo(5, 2);
  }
});

test('derivatives steer: by temperature and parameters they are the numeric ones within 3 %', () => {
  const scale = { x0: 1 / 600, dx: 2.2e-4 };
  for (const q of [-0.3, 0, 0.6]) {
    for (const what of ['centroid', 'peak', 'half'] as const) {
      const c = new Condition(what, 3);
      const value = (T: number, lnE: number, bend: number) => {
        c.evaluate(T, 1, lnE, bend, scale, at);
        return at.value;
      };
      const lnE = Math.log(250e3);
      const h = 1e-5;
      const numeric = [
        (value(640.01, lnE, q) - value(639.99, lnE, q)) / 0.02,
        (value(640, lnE + h, q) - value(640, lnE - h, q)) / (2 * h),
        (value(640, lnE, q + h) - value(640, lnE, q - h)) / (2 * h),
      ];
      c.evaluate(640, 1, lnE, q, scale, at);
      [at.byTemperature, at.byLogEnergy, at.byBend].forEach((v, k) => {
        expect(Math.abs(v - numeric[k])).toBeLessThan(
          0.03 * Math.max(0.5 * Math.abs(numeric[1]), Math.abs(numeric[k])),
        );
      });
    }
  }
});
