import { mkdir, open, readFile, rm, writeFile } from 'node:fs/promises';
import { dirname, join } from 'node:path';
import { FORECAST_CAUTION } from '../../../schema/wire/forecasts.ts';
import { buildDemoCampaign, type DemoCampaign } from '../../simulate/index.ts';
import type { ResultRow } from '../../store/index.ts';
import { wholeNumber } from '../arguments.ts';
import { listCampaignFolder } from '../campaign-folder.ts';
import { Client } from '../client.ts';
import { compareWithTruth } from '../demo-check.ts';
import { compareGoals } from '../demo-goals-check.ts';
import { dataFolder } from '../environment.ts';
import { EXIT } from '../exit.ts';
import { followCampaign } from '../follow.ts';
import { sendFolder } from '../send-folder.ts';
import { startEverything, untilInterrupted } from '../server.ts';
import type { Terminal } from '../terminal.ts';

const CAMPAIGN = 'synthetic demo';

/** `demo`: a synthetic campaign with known truth through the real server; what comes out stands beside what was put in. */
export async function demo(
  _positionals: string[],
  values: Record<string, string | boolean | undefined>,
  terminal: Terminal,
): Promise<number> {
  const port = wholeNumber('demo', 'port', values.port, [0, 65_535]) ?? 8787;
  const workers = wholeNumber('demo', 'workers', values.workers, [0, 256]);
  const home = join(dataFolder(), 'demo');
  const campaign = buildDemoCampaign();
  const folder = join(home, 'campaign');
  await writeCampaign(campaign, folder);
  terminal.note(`synthetic campaign written to ${folder} (${campaign.files.length} files)`);
  const store = await takeStore(home);
  const stores = { dataDir: store.folder };
  const page = values.once !== true;
  const server = await startEverything(
    'demo',
    { stores, port, host: '127.0.0.1', workers, anyPort: true, page },
    terminal,
  );
  try {
    const failures = await sendAndCompare(new Client(server.url), campaign, folder, terminal);
    for (const failure of failures) terminal.warn(`expected, but: ${failure}`);
    if (!values.once) {
      terminal.out(`\ndashboard on ${server.url} (Ctrl+C stops it)\n`);
      await untilInterrupted(terminal);
    }
    return failures.length > 0 ? EXIT.failed : EXIT.done;
  } finally {
    await server.stop();
    await store.release();
  }
}

async function sendAndCompare(
  client: Client,
  demoCampaign: DemoCampaign,
  folder: string,
  terminal: Terminal,
): Promise<string[]> {
  const campaign = await client.openCampaign(CAMPAIGN);
  const { refused } = await sendFolder(client, campaign, await listCampaignFolder(folder), terminal);
  const status = await followCampaign(() => client.status(campaign), terminal);
  const collect = async (table: 'parameters' | 'flags' | 'gaps' | 'forecasts'): Promise<ResultRow[]> => {
    const rows: ResultRow[] = [];
    for await (const row of client.rows(campaign, table)) rows.push(row);
    return rows;
  };
  const { text, failures } = compareWithTruth(demoCampaign.truth, demoCampaign.flaws, {
    parameters: await collect('parameters'),
    flags: await collect('flags'),
    gaps: await collect('gaps'),
  });
  const goals = compareGoals(demoCampaign.goals, await collect('forecasts'));
  terminal.out(`\nSYNTHETIC data: three invented materials on three invented instruments, truth known\n\n${text}`);
  terminal.out(`\n${goals.text}${FORECAST_CAUTION}\n`);
  return [
    ...refused.map(({ file, reason }) => `${file} was refused: ${reason}`),
    ...(status.jobs.failed > 0 ? [`${status.jobs.failed} jobs failed`] : []),
    ...failures,
    ...goals.failures,
  ];
}

/** The demo folder as it must be: what an older version left there goes. */
async function writeCampaign({ files }: DemoCampaign, folder: string): Promise<void> {
  await rm(folder, { recursive: true, force: true });
  for (const { path, bytes } of files) {
    await mkdir(dirname(join(folder, path)), { recursive: true });
    await writeFile(join(folder, path), bytes);
  }
}

interface DemoStore {
  folder: string;
  release(): Promise<void>;
}

/**
 * A fresh store folder under data/demo. Another demo that is still up keeps its own: each is marked by the process that
 * holds it, and the first one that nobody alive holds is emptied and used.
 */
async function takeStore(home: string): Promise<DemoStore> {
  for (let n = 1; ; n++) {
    const folder = join(home, `store-${n}`);
    const mark = join(home, `store-${n}.pid`);
    const holder = Number(await readFile(mark, 'utf8').catch(() => ''));
    if (holder > 0 && isAlive(holder)) continue;
    await rm(mark, { force: true });
    // `wx` fails when another demo was quicker.
    const file = await open(mark, 'wx').catch((error: NodeJS.ErrnoException) => {
      if (error.code !== 'EEXIST') throw error;
    });
    if (!file) continue;
    await file.writeFile(String(process.pid));
    await file.close();
    await rm(folder, { recursive: true, force: true });
    return { folder, release: () => rm(mark, { force: true }) };
  }
}

function isAlive(pid: number): boolean {
  try {
    process.kill(pid, 0);
    return true;
  } catch (error) {
    return (error as NodeJS.ErrnoException).code === 'EPERM';
  }
}
