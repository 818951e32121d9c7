import { createServer } from 'node:http';
import type { AddressInfo } from 'node:net';
import { getRequestListener } from '@hono/node-server';
import { inject } from 'vitest';
import { outlineOf } from '../../api/curves.ts';
import { MAX_LIMIT } from '../../api/openapi.ts';
import { createPages } from '../../api/static-pages.ts';
import { FLAG_CODES, type FlagCode } from '../../schema/wire/flags.ts';
import { SCAN_STATES } from '../../schema/wire/states.ts';

export const LARGE = { samples: 200, scansPerSample: 40, curvePoints: 2000 };

const INSTRUMENTS = ['furnace-a', 'furnace-b', 'chip-a'];
const sampleName = (i: number): string => `glass-${String(i).padStart(3, '0')}`;

const scans = Array.from({ length: LARGE.samples }, (_, i) =>
  Array.from({ length: LARGE.scansPerSample }, (_, k) => {
    const rate = 0.02 * 10 ** ((k / LARGE.scansPerSample) * 6);
    const peak = 1 / (0.0021 - 0.00012 * Math.log10(rate / 0.02));
    return {
      file: `${sampleName(i)}/${INSTRUMENTS[k % 3]}/scan-${k}.txt`,
      sha256: `${i}-${k}`,
      sample: sampleName(i),
      instrument: INSTRUMENTS[k % 3],
      role: 'sample',
      event: 1,
      status: 'reduced',
      reason: null,
      rate_nominal_K_per_s: rate,
      rate_K_per_s: rate,
      mass_mg: 10,
      glass_transition_K: peak - 60,
      onset_K: peak - 5,
      peak_K: peak,
      end_K: peak + 6,
      width_K: 6,
      enthalpy_J_per_g: 60,
      flags: k % 5 === 0 ? ['self-heating'] : [],
      segment: 1,
      replicate: null,
      centroid_K: peak,
    };
  }),
);

const parameters = scans.flatMap(([{ sample }]) =>
  [null, ...Array.from({ length: 19 }, (_, i) => (i + 1) / 20)].map((conversion) => ({
    sample,
    event: 1,
    quantity: 'activation_energy',
    method: 'vyazovkin',
    conversion,
    temperature_K: null,
    value: 200,
    unit: 'kJ/mol',
    lower95: 198,
    upper95: 202,
    scan_count: LARGE.scansPerSample,
    rate_min_K_per_s: 0.02,
    rate_max_K_per_s: 2e4,
    flags: [],
    interval: 'monte_carlo',
    variant: '',
  })),
);

const flags = scans.flat().flatMap(({ sample, instrument, file, flags: codes }) =>
  codes.map((code) => ({
    severity: FLAG_CODES[code as FlagCode][0],
    code,
    sample,
    instrument,
    file,
    event: 1,
    detail: 'The event warms the sample by 0.4 K.',
    action: 'use less mass',
  })),
);

const status = {
  settled: true,
  scans: Object.fromEntries(SCAN_STATES.map((state) => [state, state === 'reduced' ? scans.flat().length : 0])),
  samples: scans.map(([{ sample }], i) => ({ id: `m_${i}`, sample, state: 'fitted', verdict: 'straight' })),
  jobs: { queued: 0, running: 0, failed: 0, oldest_age_s: null },
  eta_s: 0,
};

const axes = { x: { quantity: 'temperature', unit: 'K' }, y: { quantity: 'heat flow', unit: 'W' } };

function curves(kind: string, sample: number) {
  const own = scans[sample];
  if (!['thermogram', 'baseline', 'conversion'].includes(kind)) return { kind, ...axes, series: [] };
  const count = kind === 'conversion' ? 99 : LARGE.curvePoints;
  return {
    kind,
    ...axes,
    series: own.map((scan, k) => {
      const x = Array.from(
        { length: count },
        (_, i) => scan.peak_K + ((i / count) * 2 - 1) * (kind === 'conversion' ? 12 : 100),
      );
      const y = x.map((t, i) =>
        kind === 'conversion'
          ? (i + 1) / 100
          : Math.exp(-(((t - scan.peak_K) / 3) ** 2)) + 0.01 * Math.sin(i * 1.7 + k),
      );
      const name = kind === 'conversion' ? `${scan.file}, event 1` : scan.file;
      return { name, instrument: scan.instrument, scan_id: `s_${sample}_${k}`, x, y };
    }),
  };
}

const TABLES: Record<string, readonly object[]> = {
  scans: scans.flat(),
  parameters,
  flags,
  coverage: [],
  gaps: [],
  advice: [],
  verdicts: [],
  forecasts: [],
  instruments: INSTRUMENTS.map((instrument) => ({
    instrument,
    kind: 'furnace',
    offset_K: 0.1,
    offset_se_K: 0.1,
    lag_s: 2,
    lag_se_s: 0.1,
    heat_factor: null,
    heat_factor_se: null,
    standards: 0,
    source: 'sheet',
    offset_slope: null,
    response_time_s: null,
  })),
};

function overview(sample: string | null): object {
  const head = {
    campaign: { id: 'large', name: 'large', created_at: '2026-01-01T00:00:00Z', revision: 1 },
    status,
    state: '1',
  };
  const first = (table: string, rows = TABLES[table]) => rows.slice(0, MAX_LIMIT);
  const tables = ['scans', 'coverage', 'gaps', 'flags', 'instruments', 'advice', 'parameters'];
  if (sample === null)
    return { ...head, is_whole: false, tables: Object.fromEntries(tables.map((table) => [table, first(table)])) };
  const place = status.samples.findIndex((s) => s.sample === sample);
  return {
    ...head,
    is_whole: true,
    tables: { scans: scans[place], verdicts: TABLES.verdicts, instruments: TABLES.instruments },
    scans: [],
    outlines: ['thermogram', 'baseline'].map((kind) => {
      const whole = curves(kind, place);
      return { ...whole, series: whole.series.map(outlineOf) };
    }),
  };
}

function answer(url: URL): object {
  const parts = url.pathname.split('/').slice(2);
  const asked = (name: string) => url.searchParams.get(name);
  if (parts[0] === 'samples' && parts.length === 2) return { id: parts[1], sample: '', scans: [] };
  if (parts[0] === 'samples') return curves(asked('kind') ?? '', Number(parts[1].slice(2)));
  if (parts[2] === 'status') return status;
  if (parts[2] === 'overview') return overview(asked('sample'));
  const rows = TABLES[parts[2]].filter((row) => {
    const cells = row as Record<string, unknown>;
    return ['sample', 'method', 'quantity'].every((name) => asked(name) === null || cells[name] === asked(name));
  });
  const after = Number(asked('after') ?? 0);
  const limit = Number(asked('limit'));
  return {
    items: rows.slice(after, after + limit),
    next: after + limit < rows.length ? String(after + limit) : null,
  };
}

/** The page, and the API from memory with a campaign of 200 samples × 40 scans, paged as the server pages. */
export async function serveLargeCampaign(): Promise<{ url: string; stop(): Promise<void> }> {
  const pages = createPages(inject('webDir'));
  const answered = new Map<string, string>();
  const handle = async (request: Request): Promise<Response> => {
    const url = new URL(request.url);
    if (!url.pathname.startsWith('/v1/')) return pages(request);
    // A stream that has nothing new to tell: the page knows the state from its first answer.
    if (url.pathname.endsWith('/stream'))
      return new Response(new ReadableStream(), { headers: { 'content-type': 'text/event-stream' } });
    const body = answered.get(request.url) ?? JSON.stringify(answer(url));
    answered.set(request.url, body);
    return new Response(body, { headers: { 'content-type': 'application/json' } });
  };
  const server = createServer(getRequestListener(handle, { overrideGlobalObjects: false }));
  await new Promise<void>((resolve) => server.listen(0, '127.0.0.1', () => resolve()));
  return {
    url: `http://127.0.0.1:${(server.address() as AddressInfo).port}`,
    stop: () =>
      new Promise((resolve) => {
        server.close(() => resolve());
        server.closeAllConnections();
      }),
  };
}
