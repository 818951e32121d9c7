import { spawn } from 'node:child_process';
import { mkdir, mkdtemp, rm, writeFile } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { dirname, join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { onTestFinished } from 'vitest';
import { runCommandLine } from '../../jobs/cli/command-line.ts';
import { createRandom } from '../../jobs/numeric/random.ts';
import { arrheniusLawAt, linearRamp, simulateScan, writeScanText } from '../../jobs/simulate/index.ts';

const ROOT = fileURLToPath(new URL('../..', import.meta.url));

export interface Outcome {
  code: number | null;
  out: string;
  err: string;
}

export interface Child {
  finished: Promise<Outcome>;
  /** Resolves with the output so far once it holds the text. */
  until(text: string): Promise<string>;
  stop(signal?: NodeJS.Signals): void;
}

/** The command line in a process of its own, as a user starts it. */
export function startCli(args: string[], environment: Record<string, string> = {}): Child {
  const child = spawn(process.execPath, ['--import', 'tsx', join(ROOT, 'jobs/cli/main.ts'), ...args], {
    cwd: ROOT,
    env: { ...process.env, RATESPAN_DATA: '/nonexistent', RATESPAN_URL: '', ...environment },
    stdio: ['ignore', 'pipe', 'pipe'],
  });
  onTestFinished(() => void child.kill('SIGKILL'));
  let [out, err] = ['', ''];
  const watchers = new Set<() => void>();
  child.stdout.on('data', (chunk) => {
    out += chunk;
    for (const watcher of watchers) watcher();
  });
  child.stderr.on('data', (chunk) => {
    err += chunk;
  });
  const finished = new Promise<Outcome>((resolve) => child.on('close', (code) => resolve({ code, out, err })));
  return {
    finished,
    stop: (signal = 'SIGINT') => void child.kill(signal),
    until: (text) =>
      new Promise((resolve, reject) => {
        const look = () => out.includes(text) && resolve(out);
        watchers.add(look);
        look();
        void finished.then(() => reject(new Error(`ended without ${JSON.stringify(text)}:\n${out}\n${err}`)));
      }),
  };
}

export const runCli = (args: string[], environment?: Record<string, string>): Promise<Outcome> =>
  startCli(args, environment).finished;

/** The same in this process, without the time that a start takes. */
export async function runHere(args: string[]): Promise<Outcome> {
  let [out, err] = ['', ''];
  const say = (text: string): void => {
    err += `${text}\n`;
  };
  const code = await runCommandLine(args, (quiet) => ({
    interrupt: new AbortController().signal,
    out: (text) => {
      out += text;
    },
    note: quiet ? () => undefined : say,
    warn: say,
    progress: () => undefined,
  }));
  return { code, out, err };
}

export async function temporaryFolder(): Promise<string> {
  const folder = await mkdtemp(join(tmpdir(), 'ratespan-cli-'));
  onTestFinished(() => rm(folder, { recursive: true, force: true }));
  return folder;
}

export async function writeTree(folder: string, files: Record<string, string | Uint8Array>): Promise<void> {
  for (const [path, content] of Object.entries(files)) {
    await mkdir(dirname(join(folder, path)), { recursive: true });
    await writeFile(join(folder, path), content);
  }
}

export const TINY_TRUTH = { energyKJPerMol: 250, avramiExponent: 3 };

/** A small campaign: one sample, three rates twice, in the folder layout, with sheets. */
export function tinyCampaign(): Record<string, string | Uint8Array> {
  const random = createRandom('tiny campaign');
  const files: Record<string, string | Uint8Array> = {
    'instruments.csv':
      'instrument,kind,lag [s],lag error [s],offset [K],offset error [K],response time [s]\noven,furnace,2,0.1,0,0.1,1\n',
  };
  const law = arrheniusLawAt(TINY_TRUTH.energyKJPerMol * 1000, 600, 1 / 6);
  const sheet = ['file,sample,instrument,rate [K/min],mass [mg],exotherm'];
  for (const perMinute of [4, 10, 40]) {
    for (const replicate of ['a', 'b']) {
      const scan = simulateScan(
        { law, avramiExponent: TINY_TRUTH.avramiExponent, enthalpyJPerKg: 80_000 },
        8e-6,
        {
          offsetK: 0.05 * random.normal(),
          shiftS: 1,
          responseS: 1,
          exotherm: 'up',
          noiseFraction: 0.003,
          drift: { linear: 0.03, quadratic: 0.02 },
          stepS: (0.15 * 60) / perMinute,
        },
        linearRamp(500, 680, perMinute / 60),
        random,
      );
      const path = `glass/oven/${perMinute}-${replicate}.txt`;
      sheet.push(`${path},glass,oven,${perMinute},8,up`);
      files[path] = writeScanText(scan, {
        encoding: 'utf-8',
        lineEnd: '\n',
        delimiter: '\t',
        decimal: '.',
        timeUnit: 's',
        temperatureUnit: '°C',
        heatFlowUnit: 'mW',
        unitPlace: 'brackets',
        headers: { time: 'Time', temperature: 'Temperature', heatFlow: 'Heat flow' },
        preamble: ['synthetic'],
      });
    }
  }
  files['scans.csv'] = `${sheet.join('\n')}\n`;
  return files;
}
