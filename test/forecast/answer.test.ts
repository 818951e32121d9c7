import { describe, expect, test } from 'vitest';
import { answerQuestion, forecastTable, standardTemperatures } from '../../jobs/forecast/index.ts';
import { studentQuantile } from '../../jobs/numeric/distributions.ts';
import { standardDeviation } from '../../jobs/numeric/statistics.ts';
import { FORECAST_CAUTION, FORECAST_TABLES, type ForecastQuestion } from '../../schema/wire/forecasts.ts';
import { csvCell } from '../../schema/wire/result-tables.ts';
import { GAS_CONSTANT as R } from '../../schema/wire/units.ts';
import { LAW, programme, sourceOf, straightLaw } from './sources.ts';

const STRAIGHT = straightLaw(250e3, 40, 2.5, 600, 680);
const timeTo = (conversion: number, temperatureK: number): ForecastQuestion => ({
  question: 'time_to_conversion',
  conversion,
  temperatureK,
});

describe('time to conversion at a constant temperature', () => {
  test('both methods give t = [−ln(1−α)]^(1/n)/K(T) for one Arrhenius law, at any temperature', () => {
    for (const T of [500, 600, 640, 700]) {
      for (const a of [0.001, 0.01, 0.5, 0.95, 0.99]) {
        // Closed form: JMAK at constant temperature.
        const exact = (-Math.log1p(-a)) ** (1 / 2.5) / Math.exp(40 - 250e3 / (R * T));
        const [shared, free] = answerQuestion(sourceOf(STRAIGHT), timeTo(a, T));
        expect(shared).toMatchObject({ method: 'shared_law', unit: 's', conversion: a });
        expect(Math.abs(shared.value! / exact - 1)).toBeLessThan(1e-10);
        expect(free.method).toBe('model_free');
        expect(Math.abs(free.value! / exact - 1)).toBeLessThan(1e-9);
        expect(shared.flags).not.toContain('forecasts-disagree');
      }
    }
  });

  test('the band is estimate ·/÷ exp(t × spread of ln t over the draws), the draws of K and n taken together', () => {
    const source = sourceOf(STRAIGHT);
    const [row] = answerQuestion(source, timeTo(0.3, 640));
    const d = source.lawDraws!;
    const ln = Array.from(d.bend, (q, i) => {
      const z = (q * (1 / 640 - STRAIGHT.x0PerK)) / STRAIGHT.dxPerK;
      const term = Math.abs(z) < 1e-12 ? (1 / 640 - STRAIGHT.x0PerK) / STRAIGHT.dxPerK : Math.expm1(z) / q;
      return (
        Math.log(-Math.log1p(-0.3)) / d.avramiExponent[i] -
        d.lnRateAtMiddle[i] +
        ((d.energyJPerMol[i] * STRAIGHT.dxPerK) / R) * term
      );
    });
    const half = studentQuantile(0.975, 8) * standardDeviation(ln);
    expect(Math.log(row.upper95! / row.value!)).toBeCloseTo(half, 9);
    expect(Math.log(row.value! / row.lower95!)).toBeCloseTo(half, 9);
  });

  test('outside the data: distance in K and decades, and the flag; inside neither', () => {
    const [below] = answerQuestion(sourceOf(STRAIGHT), timeTo(0.5, 550));
    expect(below.beyond_measured_K).toBeCloseTo(50, 9);
    expect(below.beyond_measured_decades).toBeCloseTo(((250e3 / R) * (1 / 550 - 1 / 600)) / Math.LN10, 9);
    expect(below.flags).toContain('extrapolates');
    expect(below.detail).toContain('50 K');
    const [inside] = answerQuestion(sourceOf(STRAIGHT), timeTo(0.5, 650));
    expect(inside).toMatchObject({ beyond_measured_K: 0, beyond_measured_decades: 0, flags: [] });
  });
});

describe('a bent law below its frozen point', () => {
  const source = sourceOf(LAW, {}, { glassTransitionK: 600 });
  const [shared, free] = answerQuestion(source, timeTo(0.01, 540));
  test('E_loc is held, so the time is far shorter than the bend carried on and longer than the straight law', () => {
    const x = 1 / 540;
    const u = (x - LAW.x0PerK) / LAW.dxPerK;
    const bentOn =
      (-Math.log1p(-0.01)) ** (1 / 2.6) /
      Math.exp(LAW.lnRateAtMiddle - ((280e3 * LAW.dxPerK) / R) * (Math.expm1(0.35 * u) / 0.35));
    expect(shared.value!).toBeLessThan(bentOn / 3);
    expect(shared.lower95!).toBeLessThan(shared.value! / 3);
    expect(shared.detail).toContain('straight Arrhenius law');
    expect(shared.detail.indexOf('At least')).toBe(0);
  });
  test('the pessimistic end is the least-squares straight line of ln K over the measured span', () => {
    // Independent: a discrete fit on 20 001 even points of 1/T.
    const n = 20001;
    const u = Array.from({ length: n }, (_, i) => -1 + (2 * i) / (n - 1));
    const y = u.map((v) => LAW.lnRateAtMiddle - ((280e3 * LAW.dxPerK) / R) * (Math.expm1(0.35 * v) / 0.35));
    const mean = y.reduce((s, v) => s + v, 0) / n;
    const slope = u.reduce((s, v, i) => s + v * (y[i] - mean), 0) / u.reduce((s, v) => s + v * v, 0);
    const lnK = mean + slope * ((1 / 540 - LAW.x0PerK) / LAW.dxPerK);
    const straight = (-Math.log1p(-0.01)) ** (1 / 2.6) / Math.exp(lnK);
    expect(Math.abs(Math.log(shared.lower95! / straight))).toBeLessThan(1e-3);
  });
  test('flags say all that is wrong with it', () => {
    expect(shared.flags).toEqual(
      ['extrapolates', 'crosses-glass-transition', 'forecasts-disagree', 'driving-force-ignored'].filter(
        (f) => f !== 'driving-force-ignored',
      ),
    );
    expect(free.flags).toEqual(['extrapolates', 'crosses-glass-transition', 'forecast-straight', 'forecasts-disagree']);
  });
});

describe('the inverse and the goals', () => {
  test('the temperature limit gives back the time it was asked for', () => {
    const source = sourceOf(STRAIGHT);
    const rows = answerQuestion(source, { question: 'temperature_limit', conversion: 0.01, timeS: 3.2e7 });
    for (const row of rows) {
      expect(row.unit).toBe('°C');
      const back = answerQuestion(source, timeTo(0.01, row.value! + 273.15)).find((r) => r.method === row.method)!;
      expect(Math.abs(back.value! / 3.2e7 - 1)).toBeLessThan(1e-8);
      expect(row.lower95!).toBeLessThan(row.value!);
      expect(row.upper95!).toBeGreaterThan(row.value!);
    }
  });

  test('met by the pessimistic end, not met by the optimistic end, else cannot say', () => {
    const source = sourceOf(STRAIGHT);
    const [row] = answerQuestion(source, timeTo(0.01, 600));
    const goal = (timeS: number) => answerQuestion(source, timeTo(0.01, 600), { timeS })[0].goal;
    expect(goal(row.lower95! * 0.999)).toBe('met');
    expect(goal(row.lower95! * 1.001)).toBe('cannot_say');
    expect(goal(row.upper95! * 0.999)).toBe('cannot_say');
    expect(goal(row.upper95! * 1.001)).toBe('not_met');
  });

  test('a conversion after a time is the inverse of the time to it', () => {
    const source = sourceOf(STRAIGHT);
    const [shared, free] = answerQuestion(source, timeTo(0.3, 610));
    for (const row of answerQuestion(source, {
      question: 'conversion_at_end',
      temperatureK: 610,
      timeS: shared.value!,
    })) {
      expect(row.value!).toBeCloseTo(0.3, row.method === 'shared_law' ? 10 : 4);
      expect(row.upper95!).toBeLessThanOrEqual(1);
    }
    expect(free.value!).toBeCloseTo(shared.value!, 3);
  });
});

describe('programmes', () => {
  const source = sourceOf(STRAIGHT);
  test('a hold written as a programme answers as the constant temperature does', () => {
    const hold = programme([
      [100, 620],
      [5100, 620],
    ]);
    const at = answerQuestion(source, { question: 'conversion_at_end', temperatureK: 620, timeS: 5000 });
    const along = answerQuestion(source, { question: 'conversion_at_end', programme: hold });
    along.forEach((row, i) => {
      expect(row.value!).toBeCloseTo(at[i].value!, 10);
      expect(row.lower95!).toBeCloseTo(at[i].lower95!, 5);
      expect(row.upper95!).toBeCloseTo(at[i].upper95!, 5);
    });
  });
  test('methods that differ are told on a programme too, however steep it is and wherever its clock starts', () => {
    // Far below the data, where a bent law and a straight one part; then the same ramp within the data, where they do not.
    const bent = sourceOf(LAW, {}, {});
    const hold = programme([
      [-500, 500],
      [1e12, 500],
    ]);
    for (const row of answerQuestion(bent, { question: 'time_to_conversion', conversion: 1e-6, programme: hold }))
      expect(row.flags).toContain('forecasts-disagree');
    const ramp = programme([
      [-500, 600],
      [-400, 700],
    ]);
    const rows = answerQuestion(source, { question: 'time_to_conversion', conversion: 0.5, programme: ramp });
    for (const row of rows) expect(row.flags).not.toContain('forecasts-disagree');
    expect(Math.abs(rows[0].value! - rows[1].value!)).toBeLessThan(1e-3);
  });
  test('what is not reached has no value and says so', () => {
    const short = programme(
      [
        [0, 500],
        [60, 500],
      ],
      'programs/short.csv',
    );
    for (const row of answerQuestion(source, { question: 'time_to_conversion', conversion: 0.5, programme: short })) {
      expect(row).toMatchObject({ value: null, program: 'programs/short.csv' });
      expect(row.flags).toContain('not-reached');
      expect(row.detail).toContain('not reached');
    }
  });
  test('only the temperatures at which it reacts count as its distance from the data', () => {
    // From room temperature, but all of the reaction is near 640 K, inside the data.
    const up = programme([
      [0, 298],
      [600, 640],
      [1200, 640],
    ]);
    const [row] = answerQuestion(source, { question: 'conversion_at_end', programme: up });
    expect(row.beyond_measured_K).toBe(0);
  });
});

describe('questions out of range are refused with the value', () => {
  const source = sourceOf(STRAIGHT);
  test.each([
    [timeTo(0, 600), 'conversion not in (0, 1): 0'],
    [timeTo(1.5, 600), 'conversion not in (0, 1): 1.5'],
    [timeTo(0.5, Number.NaN), 'temperature not in'],
    [{ question: 'temperature_limit', conversion: 0.5, timeS: -1 } as const, 'time not above 0 s: -1'],
    [{ question: 'conversion_at_end', programme: programme([[0, 300]]) } as const, 'at least 2'],
    [
      {
        question: 'conversion_at_end',
        programme: programme([
          [0, 300],
          [0, 310],
        ]),
      } as const,
      'row 2: time 0 s does not come after 0 s',
    ],
    [
      {
        question: 'conversion_at_end',
        programme: programme([
          [0, 300],
          [1, -4],
        ]),
      } as const,
      'row 2: temperature not in',
    ],
  ])('%o', (question, message) => {
    expect(() => answerQuestion(source, question as ForecastQuestion)).toThrow(message);
  });
});

describe('forecasts.csv', () => {
  const source = sourceOf(LAW, {}, { glassTransitionK: 590 });
  test('with no goal: α 0.01 and 0.5 at five whole temperatures, two methods', () => {
    const rows = forecastTable(source, [], []);
    expect(rows).toHaveLength(20);
    expect(new Set(rows.map((r) => r.temperature_C!.toFixed(9))).size).toBe(5);
    for (const T of standardTemperatures(source)) expect((T - 273.15) % 1).toBeCloseTo(0, 9);
  });
  test('goals ask for what they leave empty; a conversion alone is asked of every programme', () => {
    const goals = [
      { sample: 'glass-a', conversion: 0.01, temperatureK: 560, timeS: 3600 },
      { sample: 'glass-a', conversion: 0.01, timeS: 3600 },
      { sample: 'glass-a', temperatureK: 620, timeS: 60 },
      { sample: 'glass-a', conversion: 0.02 },
      { sample: 'other', conversion: 0.02 },
    ];
    const rows = forecastTable(source, goals, [
      programme(
        [
          [0, 300],
          [500, 640],
        ],
        'programs/b.csv',
      ),
      programme(
        [
          [0, 300],
          [9, 400],
        ],
        'programs/a.csv',
      ),
    ]);
    expect(rows.map((r) => [r.question, r.program, r.goal === ''])).toEqual(
      [
        ['time_to_conversion', '', false],
        ['temperature_limit', '', true],
        ['conversion_at_end', '', true],
        ['conversion_at_end', 'programs/a.csv', false],
        ['conversion_at_end', 'programs/b.csv', false],
      ].flatMap((r) => [r, r]),
    );
  });
  test('every row has the columns and nothing that is not finite, however far out', () => {
    const far = sourceOf({ ...LAW, energyJPerMol: 900e3 }, { sdEnergy: 80e3, sdBend: 0.3 });
    const goals = [1, 4, 77, 300, 900, 3000].flatMap((temperatureK) =>
      [1e-9, 0.5, 0.999].map((conversion) => ({ sample: 'glass-a', conversion, temperatureK, timeS: 1e9 })),
    );
    const rows = forecastTable(
      far,
      [
        ...goals,
        { sample: 'glass-a', conversion: 0.5, timeS: 1e-300 },
        { sample: 'glass-a', temperatureK: 5, timeS: 1e300 },
      ],
      [],
    );
    expect(rows.length).toBeGreaterThan(30);
    for (const row of rows)
      for (const column of FORECAST_TABLES.forecasts) {
        expect(row).toHaveProperty(column);
        expect(
          () => csvCell((row as unknown as Record<string, number>)[column]),
          `${column} ${JSON.stringify(row)}`,
        ).not.toThrow();
      }
  });
  test('the caution stands on every row, so that a table or a row taken out of it keeps it', () => {
    expect(FORECAST_CAUTION).toContain('not a basis for process-safety, medical or release decisions');
    expect(FORECAST_TABLES.forecasts).toContain('caution');
    for (const row of forecastTable(source, [], [])) expect(row.caution).toBe(FORECAST_CAUTION);
  });
});
