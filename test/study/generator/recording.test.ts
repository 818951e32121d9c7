import { expect, test } from 'vitest';
import { buildCampaign, type CampaignPlan } from './campaign.ts';
import { rampProgramme } from './programme.ts';
import { seededRandom } from './random.ts';
import { jmakLaw } from './rate-laws.ts';
import { curvedDrift, pinkNoise, samplingTimes } from './recording.ts';
import { arrheniusLawWithPeak } from './temperature-laws.ts';

const meanOf = (values: ArrayLike<number>): number => Array.from(values).reduce((a, b) => a + b, 0) / values.length;
const varianceOf = (values: ArrayLike<number>): number =>
  meanOf(Array.from(values, (v) => v * v)) - meanOf(values) ** 2;

test('uniform and normal deviates have the moments of their distributions', () => {
  const random = seededRandom('moments');
  const uniform = Array.from({ length: 40_000 }, () => random.uniform());
  const normal = Array.from({ length: 40_000 }, () => random.normal());
  // Four standard errors of 40 000 draws
  expect(Math.abs(meanOf(uniform) - 0.5)).toBeLessThan(4 * Math.sqrt(1 / 12 / 40_000));
  expect(Math.abs(varianceOf(uniform) - 1 / 12)).toBeLessThan(4 * Math.sqrt(1 / 180 / 40_000));
  expect(Math.abs(meanOf(normal))).toBeLessThan(4 / 200);
  expect(Math.abs(varianceOf(normal) - 1)).toBeLessThan(4 * Math.sqrt(2 / 40_000));
  expect(Math.abs(meanOf(normal.map((v) => v ** 4)) - 3)).toBeLessThan(4 * Math.sqrt(96 / 40_000));
  const neighbours = normal.slice(1).map((v, k) => v * normal[k]);
  expect(Math.abs(meanOf(neighbours))).toBeLessThan(4 / 200);
});

test('forks are streams of their own and the same seed gives the same numbers', () => {
  const [a, b] = [seededRandom('s').fork('x'), seededRandom('s').fork('y')];
  expect(a.uniform()).not.toBe(b.uniform());
  expect(seededRandom('s').fork('x').uniform()).toBe(seededRandom('s').fork('x').uniform());
});

test('pink noise: unit variance, and block means that fall far slower than those of white noise', () => {
  const random = seededRandom('pink');
  const runs = Array.from({ length: 60 }, (_, k) => pinkNoise(1024, random.fork(String(k))));
  const pooled = meanOf(runs.map((run) => meanOf(run.map((v) => v * v))));
  expect(pooled).toBeGreaterThan(0.8);
  expect(pooled).toBeLessThan(1.2);
  const blockVariance = meanOf(runs.map((run) => meanOf(run.subarray(0, 64)) ** 2));
  expect(blockVariance).toBeGreaterThan(0.2); // white: 1/64
});

test('drift has the height it was asked for', () => {
  const drift = curvedDrift(samplingTimes(0, 10, 101), seededRandom('d'));
  expect(Math.max(...drift) - Math.min(...drift)).toBeCloseTo(1, 12);
});

test('uneven sampling keeps its order and its ends', () => {
  const times = samplingTimes(0, 10, 101, { jitter: 0.49, lost: 0.1, random: seededRandom('u') });
  for (let k = 1; k < times.length; k++) expect(times[k]).toBeGreaterThan(times[k - 1]);
  expect([times[0], times[times.length - 1]]).toEqual([0, 10]);
  expect(times.length).toBeLessThan(100);
});

test('the same plan gives the same bytes, another seed others', () => {
  const plan = (seed: string): CampaignPlan => ({
    seed,
    instruments: [{ instrument: 'oven', lagS: 2 }],
    samples: [],
    scans: [
      {
        file: 'a.txt',
        sample: 'glass',
        instrument: 'oven',
        model: {
          sample: {
            events: [{ temperature: arrheniusLawWithPeak(200e3, 600, 0.1), rate: jmakLaw(2), enthalpyJPerKg: 30e3 }],
          },
          instrument: { offsetK: 0, shiftS: 2, responseS: 0 },
          programme: rampProgramme(500, 700, 0.1),
          massKg: 1e-6,
        },
        recording: { noise: 0.01, drift: 0.05 },
        pointsOverWidth: 20,
        exotherm: 'up',
        sheet: { rateKPerS: 0.1 },
      },
    ],
  });
  const [one, two, other] = ['a', 'a', 'b'].map((seed) => buildCampaign(plan(seed)).files);
  expect(one).toEqual(two);
  expect(one.get('a.txt')).not.toEqual(other.get('a.txt'));
  expect(new TextDecoder().decode(one.get('scans.csv'))).toContain('a.txt,glass,oven,sample,6,1,up,,,,');
});
