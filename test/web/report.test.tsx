import { readFileSync } from 'node:fs';
import { HtmlValidate } from 'html-validate';
import { describe, expect, test } from 'vitest';
import { FORECAST_CAUTION } from '../../schema/wire/forecasts.ts';
import type { ParameterRow } from '../../schema/wire/parameters.ts';
import { PAPER_COLOURS } from '../../web/charts/style.ts';
import type { ScanRow } from '../../web/client/rows.ts';
import {
  FIGURED_SAMPLES,
  figuredSamples,
  type ReportData,
  renderReport,
  type SampleCurves,
} from '../../web/report/index.tsx';

const scan = (file: string, rate: number, row: Partial<ScanRow> = {}): ScanRow => ({
  file,
  sha256: 'ab'.repeat(32),
  sample: 'glass <1>',
  instrument: 'furnace-a',
  role: 'sample',
  event: 1,
  status: 'reduced',
  reason: null,
  rate_nominal_K_per_s: rate,
  rate_K_per_s: rate,
  mass_mg: 8,
  glass_transition_K: 330,
  onset_K: 395,
  peak_K: 400 + 10 * rate,
  end_K: 408,
  width_K: 6,
  enthalpy_J_per_g: 60,
  flags: [],
  segment: 1,
  replicate: null,
  centroid_K: 400,
  ...row,
});

const parameter = (row: Partial<ParameterRow>): ParameterRow => ({
  sample: 'glass <1>',
  event: 1,
  quantity: 'activation_energy',
  method: 'vyazovkin',
  conversion: null,
  temperature_K: null,
  value: 210.4,
  unit: 'kJ/mol',
  lower95: 208.9,
  upper95: 211.9,
  scan_count: 3,
  rate_min_K_per_s: 0.1,
  rate_max_K_per_s: 1,
  flags: [],
  interval: 'monte_carlo',
  variant: '',
  ...row,
});

const scans = [
  scan('glass/furnace-a/slow.txt', 0.1),
  scan('glass/furnace-a/fast.txt', 1),
  scan('glass/furnace-a/lost.txt', 0.5, { status: 'set_aside', reason: 'breaks off', event: null, peak_K: null }),
];
const temperature = { quantity: 'temperature', unit: 'K' };
const trace = ({ file, peak_K }: ScanRow, k: number) => {
  const x = Array.from({ length: 200 }, (_, i) => 340 + i / 2);
  const y = x.map((t) => Math.exp(-(((t - (peak_K ?? 0)) / 3) ** 2)));
  return { name: file, instrument: 'furnace-a', scan_id: `s_${k}`, x, y };
};

const data: ReportData = {
  campaign: 'films & <ribbons>',
  tables: {
    scans,
    parameters: [
      parameter({}),
      parameter({ conversion: 0.5 }),
      parameter({ conversion: 0.6, value: 209 }),
      parameter({ quantity: 'avrami_exponent', method: 'jmak', value: 3, lower95: 2.9, upper95: 3.1, unit: '1' }),
    ],
    instruments: [
      {
        instrument: 'furnace-a',
        kind: 'furnace',
        offset_K: 0.3,
        offset_se_K: 0.1,
        lag_s: 2,
        lag_se_s: 0.1,
        heat_factor: null,
        heat_factor_se: null,
        standards: 0,
        source: 'sheet',
        offset_slope: null,
        response_time_s: null,
      },
    ],
    coverage: [],
    gaps: [{ sample: 'glass <1>', code: 'few-rates', detail: 'two rates', action: 'run a third' }],
    flags: [
      {
        severity: 'warn',
        code: 'event-cut',
        sample: 'glass <1>',
        instrument: 'furnace-a',
        file: 'glass/furnace-a/fast.txt',
        event: 1,
        detail: 'cut at 409 K',
        action: 'scan further',
      },
    ],
  },
  samples: [
    {
      sample: 'glass <1>',
      state: 'fitted',
    },
  ],
  provenance: {
    version: '0.1.0',
    stepVersions: { 'fit-sample': 2 },
    draws: 400,
    seeds: { 'glass <1>': 'cd'.repeat(32) },
    inputs: [{ file: 'glass/furnace-a/slow.txt', sha256: 'ef'.repeat(32) }],
  },
};

const curves: SampleCurves = {
  thermogram: {
    kind: 'thermogram',
    x: temperature,
    y: { quantity: 'heat flow', unit: 'W' },
    series: scans.slice(0, 2).map(trace),
  },
  baseline: { kind: 'baseline', x: temperature, y: { quantity: 'baseline', unit: 'W' }, series: [] },
  energy: {
    kind: 'energy',
    x: { quantity: 'conversion', unit: '1' },
    y: { quantity: 'activation energy', unit: 'kJ/mol' },
    series: [{ name: 'event 1, vyazovkin', x: [0.5, 0.6], y: [210, 209], lower: [208, 207], upper: [212, 211] }],
  },
};

/** The whole page, with the figures of all samples or of the named ones. */
async function page(shown: ReportData, figured = shown.samples.map(({ sample }) => sample)): Promise<string> {
  let html = '';
  for await (const piece of renderReport(shown, new Set(figured), () => curves)) html += piece;
  return html;
}

const verdicts: ReportData['tables']['verdicts'] = [
  {
    sample: 'glass <1>',
    event: 1,
    verdict: 'material',
    bend: 0.31,
    bend_lower99: 0.22,
    bend_upper99: 0.4,
    p_value: 0.0004,
    delta_aicc: 30,
    energy_low_rate_kJ_per_mol: 250,
    energy_high_rate_kJ_per_mol: 160,
    instruments: ['furnace-a'],
    rate_min_K_per_s: 0.1,
    rate_max_K_per_s: 1,
    decides_next: '',
  },
];
const forecasts: ReportData['tables']['forecasts'] = [
  {
    sample: 'glass <1>',
    event: 1,
    method: 'shared_law',
    conversion: 0.01,
    temperature_C: 60,
    program: '',
    value: 31_557_600 * 4,
    unit: 's',
    lower95: 86_400 * 200,
    upper95: null,
    beyond_measured_K: 61.5,
    flags: ['extrapolates'],
    question: 'time_to_conversion',
    time_s: null,
    goal: 'met',
    beyond_measured_decades: 3,
    detail: 'At least 200 days.',
    caution: '',
  },
];

const html = await page(data);
const text = (shown: string): string =>
  shown
    .replace(/<style>.*?<\/style>/s, '')
    .replace(/<[^>]+>/g, ' ')
    .replace(/\s+/g, ' ');

describe('the report', () => {
  // html-validate: an offline validator of the HTML standard.
  test('is valid HTML, with and without verdicts and forecasts', async () => {
    const validator = new HtmlValidate({
      extends: ['html-validate:standard'],
      // The HTML standard allows a bare > in text.
      rules: { 'no-raw-characters': 'off' },
    });
    for (const shown of [html, await page({ ...data, tables: { ...data.tables, verdicts, forecasts } })]) {
      const { results } = await validator.validateString(shown);
      expect(results.flatMap(({ messages }) => messages.map(({ ruleId, message }) => `${ruleId}: ${message}`))).toEqual(
        [],
      );
    }
    expect((await validator.validateString('<p><div></p>')).valid).toBe(false);
  });

  test('loads and runs nothing', () => {
    expect(html).not.toMatch(/<(script|link|iframe|img|object|embed)|\ssrc=|@import|url\(|\son\w+=/i);
    expect(html.match(/https?:\/\/[^"'\s<]+/g) ?? []).toEqual([]);
  });

  test('shows text of the campaign as text', () => {
    expect(html).toContain(
      '<title>Crystallisation kinetics: films &amp; &lt;ribbons></title>'.replace('s></', 's&gt;</'),
    );
    expect(html).not.toContain('<1>');
  });

  test('holds numbers with their intervals, methods with their sources, flags, gaps and where all comes from', () => {
    const words = text(html);
    for (const phrase of [
      '210.4 ± 1.5',
      'Vyazovkin 2001',
      '0.50',
      'Two rates',
      'cut at 409 K',
      'set aside',
      'breaks off',
      'ef'.repeat(32),
      'cd'.repeat(32),
      'fit-sample 2',
      '400 draws',
      '0.30 ± 0.20 K',
    ])
      expect(words, phrase).toContain(phrase);
    // A method that gave no number here is not told.
    expect(words).not.toContain('Matusita');
    expect(words).not.toContain(FORECAST_CAUTION);
    expect(html.match(/class="lane hue/g)).toHaveLength(2);
  });

  test('tells verdicts and forecasts when there are any, with the standing caution', async () => {
    const words = text(await page({ ...data, tables: { ...data.tables, verdicts, forecasts } }));
    expect(words).toContain('Bend B = 0.31 ± 0.09 (99 % interval; 0 is straight)');
    expect(words).toContain('250 kJ/mol at the slow end and 160 kJ/mol at the fast end');
    expect(words).toContain('time to α = 0.01 at 60.0 °C 4 a 200 d to –');
    expect(words).toContain('At least 200 days. The goal is met. A forecast lies outside the measured temperatures.');
    expect(words).toContain(FORECAST_CAUTION);
  });

  test('is the same bytes for the same data', async () => {
    expect(await page(structuredClone(data))).toBe(html);
  });

  test('a campaign of many samples is told with the figures of flagged ones only, and says so', async () => {
    const names = Array.from({ length: FIGURED_SAMPLES + 50 }, (_, i) => `glass ${i}`);
    const samples = names.map((sample) => ({ sample, state: 'fitted' as const }));
    const flag = (severity: 'stop' | 'warn' | 'note', sample: string) => ({
      ...data.tables.flags[0],
      severity,
      sample,
    });
    const flags = [
      ...names.slice(0, FIGURED_SAMPLES + 20).map((name) => flag('warn', name)),
      flag('note', names[FIGURED_SAMPLES + 30]),
      flag('stop', names[FIGURED_SAMPLES + 40]),
    ];
    const figured = figuredSamples(samples, flags, []);
    expect(figured.size).toBe(FIGURED_SAMPLES);
    expect(figured.has(names[FIGURED_SAMPLES + 40])).toBe(true);
    expect(figured.has(names[FIGURED_SAMPLES + 30])).toBe(false);
    expect(figuredSamples(samples.slice(0, FIGURED_SAMPLES), flags, []).size).toBe(FIGURED_SAMPLES);
    const long = await page({ ...data, samples, tables: { ...data.tables, flags } }, [names[0], names[1]]);
    expect(long.match(/<figcaption><strong>Activation energy over conversion/g)).toHaveLength(2);
    expect(text(long)).toContain('the 2 of them with the gravest flags');
    for (const name of names) expect(long).toContain(`<h2>${name}</h2>`);
    expect(text(html)).not.toContain('gravest');
  });

  test('an empty campaign makes a page too', async () => {
    const empty = await page({
      ...data,
      samples: [],
      tables: { scans: [], parameters: [], instruments: [], coverage: [], gaps: [], flags: [] },
    });
    expect(text(empty)).toContain('Nothing is missing and nothing was flagged.');
  });
});

test('the report has the light colours of the page', () => {
  const tokens = readFileSync(new URL('../../web/style/tokens.css', import.meta.url), 'utf8');
  const light = tokens.slice(tokens.indexOf('.as-on-paper {'), tokens.indexOf('@media'));
  for (const declaration of PAPER_COLOURS.trim().split('\n')) expect(light).toContain(declaration.trim());
});
