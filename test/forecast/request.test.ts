import { describe, expect, test } from 'vitest';
import { blockPanels } from '../../jobs/forecast/blocks.ts';
import { answerQuestion, MOST_PROGRAM_ROWS, questionOf } from '../../jobs/forecast/index.ts';
import { instancesOf } from '../../jobs/forecast/instances.ts';
import type { Kinetics } from '../../jobs/forecast/kinetics.ts';
import { accumulate, FINE, layPanels, type Panels } from '../../jobs/forecast/programme.ts';
import { standardDeviation } from '../../jobs/numeric/statistics.ts';
import { LAW, sourceOf } from './sources.ts';

describe('the five forms of a request', () => {
  test.each([
    [
      { temperature_C: 85, conversion: 0.01 },
      { question: 'time_to_conversion', conversion: 0.01, temperatureK: 358.15 },
    ],
    [
      { temperature_C: 85, time_s: 60 },
      { question: 'conversion_at_end', temperatureK: 358.15, timeS: 60 },
    ],
    [
      { time_s: 60, conversion: 0.5 },
      { question: 'temperature_limit', conversion: 0.5, timeS: 60 },
    ],
  ])('%o', (request, question) => {
    expect(questionOf(request)).toEqual(question);
  });
  test('a programme, with and without a conversion', () => {
    const program = [
      [0, 25],
      [10, 260],
    ] as const;
    expect(questionOf({ program, conversion: 0.5 })).toMatchObject({ question: 'time_to_conversion', conversion: 0.5 });
    const question = questionOf({ program }, 'programs/a.csv');
    expect(question).toMatchObject({ question: 'conversion_at_end', programme: { name: 'programs/a.csv' } });
    expect('programme' in question && Array.from(question.programme.temperatureK)).toEqual([298.15, 533.15]);
  });
  test.each([
    [{}, 'nothing given'],
    [{ conversion: 0.5 }, 'conversion'],
    [{ temperature_C: 85 }, 'temperature_C'],
    [{ temperature_C: 85, conversion: 0.5, time_s: 1 }, 'temperature_C, conversion, time_s'],
    [
      {
        program: [
          [0, 1],
          [1, 2],
        ] as const,
        temperature_C: 85,
      },
      'temperature_C, program',
    ],
    [
      {
        program: [
          [1, 1],
          [0, 2],
        ] as const,
      },
      'row 2: time 0 s does not come after 1 s',
    ],
    [{ program: Array.from({ length: MOST_PROGRAM_ROWS + 1 }, (_, i) => [i, 20] as const) }, 'at most 1000 rows'],
  ])('anything else is refused: %o', (request, message) => {
    expect(() => questionOf(request)).toThrow(message);
  });
  // A swing every six hours for most of a year, the hardest kind: no two rows can share a panel.
  const program = Array.from({ length: MOST_PROGRAM_ROWS }, (_, i) => [i * 21600, 330 + 12 * Math.sin(i)] as const);
  test('the longest programme is answered with 400 draws in time for a request', () => {
    const source = sourceOf(LAW, { draws: 400 });
    answerQuestion(source, questionOf({ program: program.slice(0, 20) }));
    const started = process.cpuUsage();
    const rows = answerQuestion(source, questionOf({ program }));
    const { user } = process.cpuUsage(started);
    expect(rows.every((r) => r.lower95! <= r.value! && r.value! <= r.upper95!)).toBe(true);
    // µs of work, not of waiting; about 0.1 s. Measured on request only.
    if (process.env.RATESPAN_SPEED !== undefined) expect(user).toBeLessThan(400_000);
  });
  test('the blocks of a long programme give the band that all its panels give', () => {
    const source = sourceOf(LAW, { draws: 60 });
    const question = questionOf({ program: program.slice(0, 900), conversion: 1e-9 });
    if (!('programme' in question)) throw new Error('a programme');
    const panelsOf = (k: Kinetics) => layPanels(question.programme, (T) => k.steepness(T), k.breaksK, FINE);
    for (const m of instancesOf(source)) {
      const all = panelsOf(m.estimate);
      const lnRate = (T: number) => m.estimate.lnRate(T);
      const blocks = blockPanels(all, lnRate, accumulate(all, lnRate));
      expect(all.startS.length).toBeGreaterThan(3 * blocks.startS.length);
      expect(m.estimate.extentOn(blocks)).toBeCloseTo(m.estimate.extentOn(all), 3);
      const spread = (panels: Panels) => standardDeviation(m.draws.map((draw) => draw.extentOn(panels)));
      expect(Math.abs(spread(blocks) / spread(all) - 1)).toBeLessThan(0.03);
    }
  });
});
