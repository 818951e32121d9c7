import { createReadStream } from 'node:fs';
import { mkdir, readFile } from 'node:fs/promises';
import { availableParallelism } from 'node:os';
import { basename, dirname, join, resolve } from 'node:path';
import { Readable } from 'node:stream';
import type { CampaignStatus } from '../../../schema/wire/campaign.ts';
import { ARCHIVE_LIMITS } from '../../instrument/index.ts';
import type { Ports } from '../../ports/index.ts';
import { createRunner } from '../../runner/index.ts';
import { readSampleSeeds } from '../../steps/fit-sample.ts';
import { FIT_DRAWS, STEP_VERSIONS } from '../../steps/settings.ts';
import {
  CAMPAIGN_NAME_LIMIT,
  type Campaign,
  campaignStatus,
  createCampaign,
  findCampaign,
  listInputs,
  receiveFile,
  withdrawMissingFiles,
} from '../../store/index.ts';
import { wholeNumber, wrongUsage } from '../arguments.ts';
import {
  type CampaignFolder,
  exists,
  type FolderFile,
  hashFile,
  listCampaignFolder,
  realPath,
} from '../campaign-folder.ts';
import { describeFolder } from '../dry-run.ts';
import { leaseOwner, storesOfFile, withPorts } from '../environment.ts';
import { EXIT, UsageError } from '../exit.ts';
import { followCampaign } from '../follow.ts';
import { PROGRAM, RUN_RECORD, writeReportFile, writeResultTables, writeRunRecord } from '../result-files.ts';
import { reportRun } from '../run-report.ts';
import { progressBar, type Terminal } from '../terminal.ts';
import { VERSION } from '../version.ts';

type Values = Record<string, string | boolean | undefined>;

/** `run FOLDER --out DIR`: the whole job in one process, without a server. */
export async function run([folder]: string[], values: Values, terminal: Terminal): Promise<number> {
  const workers = wholeNumber('run', 'workers', values.workers, [0, 256]) ?? availableParallelism();
  const out = values.out === undefined ? undefined : resolve(String(values.out));
  if (values.dry) {
    const listed = await listCampaignFolder(folder, out === undefined ? [] : [out]);
    await describeFolder(listed, values.json === true, terminal);
    return EXIT.done;
  }
  if (out === undefined) throw wrongUsage('run', '--out DIR is missing');
  await refuseForeignResults(folder, out);
  const stores = storesOfFile(values.db === undefined ? join(out, 'ratespan.db') : String(values.db));
  const database = stores.databaseUrl!;
  const own = [out, stores.blobsDir!, ...['', '-wal', '-shm', '-journal'].map((end) => database + end)];
  const listed = await listCampaignFolder(folder, own);
  if (listed.files.length === 0) throw new UsageError(`the folder ${folder} holds no file to read`);
  for (const sentence of listed.skipped) terminal.note(`not read: ${sentence}`);
  await mkdir(out, { recursive: true });
  const started = performance.now();
  return withPorts({ ...stores, workers }, async (ports) => {
    const campaign = await openCampaign(ports, folder);
    const refused = await takeFiles(ports, campaign, listed, terminal);
    const taken = performance.now();
    const status = describeNow(await runJobs(ports, campaign, workers, terminal));
    const computed = performance.now();
    const rows = await writeResultTables(ports, campaign.id, out);
    await writeReportFile(ports, campaign, out);
    const hashes = new Map((await listInputs(ports, campaign.id)).map(({ file, sha256 }) => [file, sha256]));
    const inputs = [];
    for (const { path, location } of listed.files)
      inputs.push({ file: path, sha256: hashes.get(path) ?? (await hashFile(location)) });
    const written = performance.now();
    const seconds = (from: number, to: number): number => Number(((to - from) / 1000).toFixed(3));
    await writeRunRecord(out, {
      program: PROGRAM,
      version: VERSION,
      campaign: campaign.name,
      settings: { draws: FIT_DRAWS, step_versions: STEP_VERSIONS, unpack: ARCHIVE_LIMITS },
      seed: await readSampleSeeds(ports, campaign.id),
      inputs,
      refused,
      counts: { scans: status.scans, samples: countStates(status), failed_jobs: status.jobs.failed, rows },
      timings: {
        take_files_s: seconds(started, taken),
        compute_s: seconds(taken, computed),
        write_s: seconds(computed, written),
      },
    });
    await reportRun(
      { ports, campaign, status, out, json: values.json === true, quiet: values.quiet === true },
      terminal,
    );
    if (status.jobs.failed > 0) return EXIT.failed;
    return status.samples.some((s) => s.state === 'fitted') ? EXIT.done : EXIT.nothingFitted;
  });
}

/** Exit 2 rather than write over something that is not ours. */
async function refuseForeignResults(folder: string, out: string): Promise<void> {
  if ((await realPath(folder)) === (await realPath(out))) {
    throw new UsageError('--out is the campaign folder itself; give another folder for the results');
  }
  if (!(await exists(join(out, 'scans.csv')))) return;
  const record = await readFile(join(out, RUN_RECORD), 'utf8')
    .then((text) => JSON.parse(text) as { program?: unknown })
    .catch(() => undefined);
  if (record?.program === PROGRAM) return;
  throw new UsageError(
    `--out ${out} holds a scans.csv without a run.json of ratespan, so it may be a campaign folder; give another folder`,
  );
}

/** The campaign of a folder in its database goes by the folder's name. */
async function openCampaign(ports: Ports, folder: string): Promise<Campaign> {
  const path = await realPath(folder);
  const name = basename(path).trim().slice(0, CAMPAIGN_NAME_LIMIT).trim() || basename(dirname(path)) || 'campaign';
  return (await findCampaign(ports, name)) ?? (await createCampaign(ports, name));
}

/** Brings the database to what the folder holds now. Files that are gone go first, so that a renamed file keeps its scan. */
async function takeFiles(
  ports: Ports,
  campaign: Campaign,
  { files }: CampaignFolder,
  terminal: Terminal,
): Promise<{ file: string; reason: string }[]> {
  const refused: { file: string; reason: string }[] = [];
  await withdrawMissingFiles(ports, campaign.id, new Set(files.map((f) => f.path)));
  let taken = 0;
  const next = files.values();
  const takeOneByOne = async () => {
    for (const file of next) {
      terminal.interrupt.throwIfAborted();
      terminal.progress(progressBar(taken++, files.length, 'files taken in'));
      const receipt = await receiveFile(ports, campaign.id, file.path, await openBody(file), file.bytes);
      if (receipt.outcome !== 'refused') continue;
      const reason = receipt.reason ?? 'refused';
      refused.push({ file: file.path, reason });
      terminal.warn(`refused: ${file.path}: ${reason}`);
    }
  };
  await Promise.all(Array.from({ length: TAKEN_AT_ONCE }, takeOneByOne));
  refused.sort((a, b) => (a.file < b.file ? -1 : 1));
  return refused;
}

/** Files under way at once: while one is written safely to disk the next is read and noted. */
const TAKEN_AT_ONCE = 4;

/** Files up to this size are read whole: a stream for each of many small files takes longer than the file, bytes. */
const READ_WHOLE_BYTES = 4e6;

async function openBody(file: FolderFile): Promise<ReadableStream<Uint8Array> | Uint8Array> {
  if (file.bytes <= READ_WHOLE_BYTES) return new Uint8Array(await readFile(file.location));
  return Readable.toWeb(createReadStream(file.location)) as ReadableStream<Uint8Array>;
}

async function runJobs(ports: Ports, campaign: Campaign, workers: number, terminal: Terminal): Promise<CampaignStatus> {
  const runner = createRunner(ports, { concurrency: workers + 1, owner: leaseOwner('run') });
  const done = runner.drain(campaign.id);
  try {
    return await followCampaign(() => campaignStatus(ports, campaign.id), terminal, done);
  } catch (error) {
    await runner.stop();
    await done.catch(() => undefined);
    throw error;
  }
}

/** Without the scans of files that were replaced or are gone. */
function describeNow(status: CampaignStatus): CampaignStatus {
  return { ...status, scans: { ...status.scans, superseded: 0 } };
}

function countStates(status: CampaignStatus): Record<string, number> {
  const counts: Record<string, number> = {};
  for (const { state } of status.samples) counts[state] = (counts[state] ?? 0) + 1;
  return counts;
}
