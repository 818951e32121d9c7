import { strFromU8, unzipSync } from 'fflate';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { FORECAST_CAUTION } from '../../schema/wire/forecasts.ts';
import { RESULT_TABLES } from '../../schema/wire/result-tables.ts';
import { csvRecords } from './csv-cells.ts';
import { type Body, type Harness, openHarness } from './harness.ts';
import { smallCampaign, TRUE_ENERGY_KJ_PER_MOL } from './small-campaign.ts';

let api: Harness;
let campaign: string;
let sample: string;

beforeAll(async () => {
  api = await openHarness();
  const made = await api.sendJson('POST', '/v1/campaigns', {
    name: 'forecasts',
    goals: [{ sample: 'glass', conversion: 0.01, temperature_C: 250, time_s: 60 }],
  });
  campaign = made.body.id;
  await api.upload(campaign, 'samples.csv', new TextEncoder().encode('sample,melting temperature [°C]\nglass,450\n'));
  for (const [path, bytes] of smallCampaign()) await api.upload(campaign, path, bytes);
  await api.drain();
  sample = (await api.get(`/v1/campaigns/${campaign}/status`)).body.samples[0].id;
}, 60_000);
afterAll(() => api.close());

const table = async (name: string): Promise<Body[]> =>
  (await api.get(`/v1/campaigns/${campaign}/${name}?limit=1000`)).body.items;
const ask = (question: unknown) => api.sendJson('POST', `/v1/samples/${sample}/forecasts`, question);
/** JMAK of the data's own law: t = [−ln(1 − α)]^(1/n)/K(T), K = exp(35.6 − E/(R T)), n = 3; R: CODATA 2018. */
const trueTimeS = (conversion: number, celsius: number) =>
  (-Math.log1p(-conversion)) ** (1 / 3) /
  Math.exp(35.6 - (TRUE_ENERGY_KJ_PER_MOL * 1000) / (8.31446261815324 * (celsius + 273.15)));

describe('a campaign with curves', () => {
  it('has a verdict, with the energies at both ends, and says it in the status', async () => {
    const [verdict] = await table('verdicts');
    // Five rates of one straight material on one furnace: never a bend of the material.
    expect(['straight', 'undecided']).toContain(verdict.verdict);
    expect(Math.abs(verdict.energy_low_rate_kJ_per_mol / TRUE_ENERGY_KJ_PER_MOL - 1)).toBeLessThan(0.1);
    const { samples } = (await api.get(`/v1/campaigns/${campaign}/status`)).body;
    expect(samples[0].verdict).toBe(verdict.verdict);
  });

  it('answers its goal by each method, near the truth of the data, and advises scans', async () => {
    const rows = await table('forecasts');
    expect(rows.map((row) => row.question)).toEqual(rows.map(() => 'time_to_conversion'));
    for (const row of rows) {
      expect(row).toMatchObject({ conversion: 0.01, temperature_C: 250, time_s: 60, unit: 's' });
      expect(['met', 'not_met', 'cannot_say']).toContain(row.goal);
      expect(Math.abs(Math.log(row.value / trueTimeS(0.01, 250)))).toBeLessThan(0.3);
    }
    const advice = await table('advice');
    expect(advice.map((row) => row.goal)).toContain('energy');
    for (const row of advice) expect(row.interval_expected).toBeLessThan(row.interval_now);
  });

  it('takes other goals, and only the forecasts follow', async () => {
    const put = await api.sendJson('PUT', `/v1/campaigns/${campaign}/goals`, {
      goals: [{ sample: 'glass', conversion: 0.5, time_s: 3600 }],
    });
    expect(put.status).toBe(202);
    const before = await table('parameters');
    await api.drain();
    const rows = await table('forecasts');
    expect(new Set(rows.map((row) => row.question))).toEqual(new Set(['temperature_limit']));
    expect(await table('parameters')).toEqual(before);
    await api.sendJson('PUT', `/v1/campaigns/${campaign}/goals`, { goals: [] });
    await api.drain();
    // With no goal: two conversions at five temperatures.
    expect((await table('forecasts')).filter((row) => row.method === 'shared_law')).toHaveLength(10);
  });

  it.each([
    [{ temperature_C: 260, conversion: 0.5 }, 'time_to_conversion', 's'],
    [{ temperature_C: 260, time_s: 100 }, 'conversion_at_end', '1'],
    [{ time_s: 100, conversion: 0.5 }, 'temperature_limit', '°C'],
    [
      {
        program: [
          [0, 200],
          [600, 400],
        ],
        conversion: 0.5,
      },
      'time_to_conversion',
      's',
    ],
    [
      {
        program: [
          [0, 200],
          [600, 300],
        ],
      },
      'conversion_at_end',
      '1',
    ],
  ])('answers %j on request', async (question, name, unit) => {
    const { status, body } = await ask(question);
    expect(status).toBe(200);
    expect(body.caution).toBe(FORECAST_CAUTION);
    expect(body.items.length).toBeGreaterThan(0);
    for (const row of body.items) {
      expect(row).toMatchObject({ question: name, unit, sample: 'glass' });
      expect(row.lower95).toBeLessThanOrEqual(row.value);
      expect(row.upper95).toBeGreaterThanOrEqual(row.value);
    }
  });

  // A time, so measured on request only.
  it.skipIf(process.env.RATESPAN_SPEED === undefined)('answers a question within 100 ms on one core', async () => {
    await ask({ temperature_C: 261, conversion: 0.4 });
    const started = performance.now();
    for (let i = 0; i < 5; i++) await ask({ temperature_C: 262 + i, conversion: 0.4 });
    expect((performance.now() - started) / 5).toBeLessThan(100);
  });

  it.each([
    {},
    { temperature_C: 260 },
    { temperature_C: 260, conversion: 0.5, time_s: 10 },
    { temperature_C: 260, conversion: 1.5 },
    { program: [[0, 200]] },
    {
      program: [
        [0, 200],
        [0, 300],
      ],
    },
    { temperature: 260, conversion: 0.5 },
  ])('refuses %j', async (question) => {
    expect((await ask(question)).status).toBe(422);
  });

  it('draws the transformation diagram and the laws behind the verdict', async () => {
    const ttt = (await api.get(`/v1/samples/${sample}/curves?kind=ttt`)).body;
    const half = ttt.series.find((s: Body) => s.name === 'event 1, shared_law, conversion 0.5');
    // At the temperature of 250 °C the line passes the true time.
    const at = half.x.findIndex((T: number) => T >= 523.15);
    expect(Math.abs(Math.log(half.y[at] / trueTimeS(0.5, half.x[at] - 273.15)))).toBeLessThan(0.3);
    const kissinger = (await api.get(`/v1/samples/${sample}/curves?kind=kissinger`)).body;
    const names = kissinger.series.map((s: Body) => s.name);
    expect(names).toContain('event 1, straight, lags as calibrated');
    expect(names).toContain('event 1, oven, lag removed');
    const law = kissinger.series.find((s: Body) => s.name === 'event 1, straight, lags as calibrated');
    const slope = (law.y.at(-1) - law.y[0]) / (law.x.at(-1) - law.x[0]);
    expect(Math.abs((-slope * 8.31446261815324e-3) / TRUE_ENERGY_KJ_PER_MOL - 1)).toBeLessThan(0.02);
    const local = (await api.get(`/v1/samples/${sample}/curves?kind=local_energy`)).body;
    expect([local.x.unit, local.y.unit, local.series[0].name]).toEqual(['K', 'kJ/mol', 'event 1, shared law']);
    const { y, lower, upper } = local.series[0];
    expect(Math.abs(y[0] / TRUE_ENERGY_KJ_PER_MOL - 1)).toBeLessThan(0.02);
    expect(lower[0] < y[0] && y[0] < upper[0]).toBe(true);
    expect((await api.get(`/v1/samples/${sample}/curves?kind=growth`)).body.series).toEqual([]);
  });

  it('draws constant heating with bands, the distance from the data and the critical heating rate', async () => {
    const { body } = await api.get(`/v1/samples/${sample}/curves?kind=constant_heating`);
    expect([body.x, body.y]).toEqual([
      { quantity: 'heating rate', unit: 'K/s' },
      { quantity: 'temperature', unit: 'K' },
    ]);
    expect(body.caution).toBe(FORECAST_CAUTION);
    for (const method of ['shared_law', 'model_free']) {
      const half = body.series.find((s: Body) => s.name === `event 1, ${method}, conversion 0.5`);
      // At the slowest measured rate, 2 K/min: ∫K dT up to the true temperature of one half is β [−ln(1 − α)]^(1/n), by steps of 0.01 K.
      const at = half.x.findIndex((rate: number) => rate >= 2 / 60);
      let sum = 0;
      let trueK = 400;
      for (; sum < half.x[at] * Math.LN2 ** (1 / 3); trueK += 0.01)
        sum += 0.01 / trueTimeS(1 - 1 / Math.E, trueK - 273.15);
      expect(Math.abs(half.y[at] - trueK)).toBeLessThan(1);
      expect(half.lower[at] < half.y[at] && half.y[at] < half.upper[at]).toBe(true);
      expect(half.beyond_measured_K[at]).toBeLessThan(2);
      expect(half.beyond_measured_K[0]).toBeGreaterThan(20);
    }
    const row = (await table('parameters')).find((p) => p.quantity === 'critical_heating_rate')!;
    const critical = body.series.find((s: Body) => s.name === 'event 1, shared_law, critical heating rate');
    expect(critical.x).toEqual([row.value, row.value, row.lower95, row.upper95]);
    expect(critical.y.slice(1)).toEqual([723.15, 723.15, 723.15]);
    const onePercent = body.series.find((s: Body) => s.name === 'event 1, shared_law, conversion 0.01');
    expect(Math.abs(onePercent.x.at(-1) / row.value - 1)).toBeLessThan(1e-3);
    expect(onePercent.y.at(-1)).toBeGreaterThan(720);
  });
});

describe('curves and answers as CSV', () => {
  const csv = async (method: string, path: string, body?: unknown) => {
    const headers: Record<string, string> = body ? { 'content-type': 'application/json' } : {};
    const response = await api.send(method, path, {
      headers,
      ...(body !== undefined && { body: JSON.stringify(body) }),
    });
    const [columns, ...records] = csvRecords(await response.text());
    return records.map((record) => Object.fromEntries(columns.map((column, i) => [column, record[i]])));
  };
  it.each(['ttt', 'thermogram', 'kissinger'])('one row a point of %s', async (kind) => {
    const path = `/v1/samples/${sample}/curves?kind=${kind}`;
    const { x, y, series } = (await api.get(path)).body;
    const expected = series.flatMap((s: Body) =>
      s.x.map((_: number, i: number) => {
        const point = Object.entries<Body>(s).map(([key, v]) => [key, String(Array.isArray(v) ? v[i] : v)]);
        const axes = { x_quantity: x.quantity, x_unit: x.unit, y_quantity: y.quantity, y_unit: y.unit };
        return { ...axes, ...Object.fromEntries(point) };
      }),
    );
    const points = await csv('GET', `${path}&format=csv`);
    expect(points.length).toBeGreaterThan(10);
    expect(points.map((p) => Object.fromEntries(Object.entries(p).filter(([, v]) => v !== '')))).toEqual(expected);
  });
  it('one row an answer, with the caution', async () => {
    const rows = await csv('POST', `/v1/samples/${sample}/forecasts?format=csv`, {
      temperature_C: 260,
      conversion: 0.5,
    });
    expect(rows.map((row) => row.method)).toEqual(['shared_law', 'model_free']);
    for (const row of rows) expect(row.caution).toBe(FORECAST_CAUTION);
  });
});

describe('results as a whole', () => {
  it('come as one archive with the bytes of each table', async () => {
    const response = await api.send('GET', `/v1/campaigns/${campaign}/results.zip`);
    expect(response.headers.get('content-type')).toBe('application/zip');
    const bytes = new Uint8Array(await response.arrayBuffer());
    const files = unzipSync(bytes);
    expect(Object.keys(files)).toEqual([...Object.keys(RESULT_TABLES).map((name) => `${name}.csv`), 'report.html']);
    for (const name of ['parameters', 'verdicts', 'forecasts', 'conversion']) {
      const csv = await (await api.send('GET', `/v1/campaigns/${campaign}/${name}?format=csv`)).text();
      expect(strFromU8(files[`${name}.csv`])).toBe(csv);
    }
    const again = await api.send('GET', `/v1/campaigns/${campaign}/results.zip`);
    expect(new Uint8Array(await again.arrayBuffer())).toEqual(bytes);
  });

  it('come as a report that may run nothing and load nothing', async () => {
    const response = await api.send('GET', `/v1/campaigns/${campaign}/report`);
    expect(response.status).toBe(200);
    expect(response.headers.get('content-security-policy')).toContain("default-src 'none'");
    const html = await response.text();
    expect(html).toContain('glass');
    expect(html).not.toMatch(/<script|https?:\/\/(?!www\.w3\.org)/);
    const tag = response.headers.get('etag') as string;
    expect(
      (await api.send('GET', `/v1/campaigns/${campaign}/report`, { headers: { 'if-none-match': tag } })).status,
    ).toBe(304);
  });
});
