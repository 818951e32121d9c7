import { spawn } from 'node:child_process';
import { existsSync, readFileSync } from 'node:fs';
import { mkdtemp, rm } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { setTimeout as sleep } from 'node:timers/promises';
import { fileURLToPath } from 'node:url';
import { sql } from 'drizzle-orm';
import { closePorts, openNodePorts } from '../../jobs/adapters/node-ports.ts';
import { createCampaign } from '../../jobs/store/index.ts';
import type { StudyOptions } from './registry.ts';
import { markdownTable } from './table.ts';

const CLI = fileURLToPath(new URL('../../dist/cli.js', import.meta.url));
const IDLE_MS = 3_000;

/** What a reduced scan keeps in its row, about. */
const RESULT = JSON.stringify({
  segments: [{ segment: 1, kind: 'heating', from: 0, to: 4000, rateKPerS: 0.1667, startK: 400, endK: 700 }],
  segment: 1,
  massKg: 1e-5,
  events: [
    {
      event: 1,
      kind: 'heating',
      rateKPerS: 0.1667,
      onsetK: 598.1,
      peakK: 601.2,
      endK: 605.3,
      widthK: 6.1,
      centroidK: 601.4,
      peakErrorK: 0.1,
      area: 50_000,
      areaError: 300,
      usableFrom: 0.01,
      usableTo: 0.99,
      pointsOverWidth: 80,
      noiseFraction: 0.003,
      rampStartK: 420,
      hasCurve: true,
    },
  ],
});

async function fillDatabase(dataDir: string, scans: number): Promise<void> {
  const ports = await openNodePorts({ dataDir, workers: 0 });
  const { id } = await createCampaign(ports, 'synthetic');
  const numbers = sql`with recursive n(i) as (select 1 union all select i + 1 from n where i < ${scans})`;
  await ports.database.write((db) =>
    db.run(sql`${numbers} insert into files (id, campaign_id, path, sha256, bytes, blob_key, kind, state, created_at)
      select 'f_' || i, ${id}, 'sample-' || (i / 10) || '/oven/' || i || '.txt', printf('%064d', i), 90000, 'originals/x/' || i, 'data', 'read', 0 from n`),
  );
  await ports.database.write((db) =>
    db.run(sql`${numbers} insert into scans (id, campaign_id, file_id, disposition, sample, instrument, status, result)
      select 's_' || i, ${id}, 'f_' || i, 'assigned', 'sample-' || (i / 10), 'oven', 'reduced', ${RESULT} from n`),
  );
  await ports.database.write((db) =>
    db.run(sql`${numbers} insert into jobs (id, campaign_id, step, subject, priority, state, next_try_at, created_at)
      select 'j_' || i, ${id}, 'read-scan', 'f_' || i, 5, 'done', 0, 0 from n`),
  );
  await closePorts(ports);
}

async function measureServer(dataDir: string): Promise<(string | number)[]> {
  const began = performance.now();
  const server = spawn(process.execPath, [CLI, 'serve', '--port', '0', '--workers', '2'], {
    env: { ...process.env, RATESPAN_DATA: dataDir },
    stdio: ['ignore', 'pipe', 'ignore'],
  });
  try {
    const url = await new Promise<string>((resolve, reject) => {
      server.stdout.once('data', (line: Buffer) => resolve(/on (\S+)/.exec(line.toString())?.[1] ?? ''));
      server.once('exit', (code) => reject(new Error(`serve ended with ${code}`)));
    });
    const get = async (path: string): Promise<number> => {
      const from = performance.now();
      await (await fetch(url + path)).arrayBuffer();
      return performance.now() - from;
    };
    await get('/healthz');
    const startMs = performance.now() - began;
    await sleep(IDLE_MS);
    const residentMb = () =>
      Number(/VmRSS:\s+(\d+)/.exec(readFileSync(`/proc/${server.pid}/status`, 'utf8'))?.[1]) / 1000;
    const idle = residentMb();
    await get('/v1/campaigns/synthetic/status');
    const statusMs = await get('/v1/campaigns/synthetic/status');
    const pageMs = await get('/v1/campaigns/synthetic/scans?limit=100');
    const csvMs = await get('/v1/campaigns/synthetic/scans?format=csv');
    const used = residentMb();
    return [
      startMs.toFixed(0),
      idle.toFixed(0),
      used.toFixed(0),
      statusMs.toFixed(1),
      pageMs.toFixed(1),
      csvMs.toFixed(0),
    ];
  } finally {
    server.kill('SIGTERM');
  }
}

/** Start and memory of the built `serve` with an empty database and with `count` scans in one (10 000 unless told otherwise). */
export async function footprintStudy({ count = 10_000 }: StudyOptions): Promise<string> {
  if (!existsSync(CLI)) throw new Error('run `npm run build` first: the study measures the built command');
  const rows: (string | number)[][] = [];
  for (const scans of [0, count]) {
    const dataDir = await mkdtemp(join(tmpdir(), 'ratespan-footprint-'));
    try {
      await fillDatabase(dataDir, scans);
      rows.push([scans, ...(await measureServer(dataDir))]);
    } finally {
      await rm(dataDir, { recursive: true, force: true });
    }
  }
  return markdownTable(
    [
      'scans',
      'start to first answer (ms)',
      'memory idle (MB)',
      'after whole tables (MB)',
      'status (ms)',
      '100 scans (ms)',
      'scans.csv (ms)',
    ],
    rows,
  );
}
