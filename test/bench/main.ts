import { spawnSync } from 'node:child_process';
import { existsSync, readFileSync } from 'node:fs';
import { mkdir, mkdtemp, rm, writeFile } from 'node:fs/promises';
import { cpus, tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { parseArgs } from 'node:util';
import { fitReducedSample, reduceCampaign } from '../study/product-path.ts';
import { writePlainFolder } from './plain-folder.ts';

/**
 * `npm run bench -- [--samples 4,40] [--rounds 3] [--peer FILE]`: the built command's `run` beside a NumPy/SciPy script that does the same
 * work on the same folder, in turn, order reversed every round. Raw values are printed and, with --keep FILE, written as JSON.
 */
const { values } = parseArgs({
  options: {
    samples: { type: 'string', default: '4,40' },
    rounds: { type: 'string', default: '3' },
    rows: { type: 'string', default: '4000' },
    peer: { type: 'string', default: fileURLToPath(new URL('../../../shared/bench/peer.py', import.meta.url)) },
    keep: { type: 'string' },
  },
});
const cli = fileURLToPath(new URL('../../dist/cli.js', import.meta.url));
if (!existsSync(cli)) throw new Error('run `npm run build` first: the bench measures the built command');

interface Timed {
  wall_s: number;
  cpu_s: number;
  peak_mb: number;
  stages?: unknown;
}

/** Wall, CPU (children included) and peak memory of a command by a tiny Python wrapper's resource usage. */
function measure(command: string[]): Timed {
  const wrapper = `
import json, resource, subprocess, sys, time, os
for k in ("OPENBLAS_CORETYPE", "OPENBLAS_L2_SIZE"): os.environ.pop(k, None)
t = time.perf_counter(); code = subprocess.call(sys.argv[1:], stdout=subprocess.DEVNULL); w = time.perf_counter() - t
u = resource.getrusage(resource.RUSAGE_CHILDREN)
print(json.dumps({"code": code, "wall_s": w, "cpu_s": u.ru_utime + u.ru_stime, "peak_mb": u.ru_maxrss / 1024}))`;
  const done = spawnSync('python3', ['-c', wrapper, ...command], { encoding: 'utf8' });
  const result = JSON.parse(done.stdout) as Timed & { code: number };
  if (result.code !== 0) throw new Error(`${command.join(' ')} ended with ${result.code}: ${done.stderr.slice(-500)}`);
  return { wall_s: result.wall_s, cpu_s: result.cpu_s, peak_mb: result.peak_mb };
}

const median = (v: number[]): number => [...v].sort((a, b) => a - b)[v.length >> 1];

/** Where our time goes, in one thread, CPU: reading and reducing, fitting without draws, draws. */
function ownStages(folder: string, samples: number): Record<string, number> {
  const sheet = readFileSync(join(folder, 'scans.csv'), 'utf8');
  const files = new Map<string, Uint8Array>();
  for (const name of ['scans.csv', 'instruments.csv']) files.set(name, readFileSync(join(folder, name)));
  for (const line of sheet.split('\n').slice(1)) {
    const file = line.split(',')[0];
    if (file) files.set(file, readFileSync(join(folder, file)));
  }
  const clock = () => {
    const { user, system } = process.cpuUsage();
    return (user + system) / 1e6;
  };
  const at: number[] = [clock()];
  const reduced = reduceCampaign(files);
  at.push(clock());
  const names = [...new Set(reduced.scans.map((s) => s.row.sample))].slice(0, samples);
  for (const name of names) fitReducedSample(reduced, name, 2);
  at.push(clock());
  for (const name of names) fitReducedSample(reduced, name, 402);
  at.push(clock());
  const s = (k: number) => at[k + 1] - at[k];
  return { read_reduce_s: s(0), fit_s: s(1), draws_400_s: s(2) - s(1) };
}

/** Where the script's time goes, in one process: its own functions over the same files; draws are what is left of the whole. */
function peerStages(folder: string): Record<string, number> {
  const program = `
import csv, importlib.util, json, os, sys, time
spec = importlib.util.spec_from_file_location("peer", sys.argv[1]); peer = importlib.util.module_from_spec(spec); spec.loader.exec_module(peer)
folder, np, R = sys.argv[2], peer.np, peer.R
lags = {r["instrument"]: float(r["lag [s]"]) for r in csv.DictReader(open(os.path.join(folder, "instruments.csv")))}
by = {}
for r in csv.DictReader(open(os.path.join(folder, "scans.csv"))): by.setdefault(r["sample"], []).append(r)
clock = time.process_time; at = [clock()]
reduced = [[peer.reduce(r, lags[r["instrument"]], folder) for r in rows] for rows in by.values()]; at.append(clock())
for scans in reduced:
    b, Tp = (np.array([s[k] for s in scans]) for k in ("beta", "Tp")); t, T, r = (np.array([s[k] for s in scans]) for k in ("t", "T", "r"))
    E = peer.fits(b, Tp, t, T, r)["kissinger"]
    peer.jmak(b, T, np.array([E / 1e5, np.log(b.mean() * E / R / Tp.mean() ** 2), 2.5]))
at.append(clock())
for name, rows in by.items(): peer.sample((name, rows, lags, folder))
at.append(clock())
one, two, all = (at[k + 1] - at[k] for k in range(3))
print(json.dumps({"read_reduce_s": one, "fit_s": two, "draws_400_s": all - one - two}))`;
  const done = spawnSync('python3', ['-c', program, values.peer, folder], {
    encoding: 'utf8',
    env: { ...process.env, OPENBLAS_NUM_THREADS: '1' },
  });
  if (done.status !== 0) throw new Error(`the script's stages ended with ${done.status}: ${done.stderr.slice(-500)}`);
  return JSON.parse(done.stdout);
}

const record: unknown[] = [];
const work = await mkdtemp(join(tmpdir(), 'bench-'));
try {
  for (const count of values.samples.split(',').map(Number)) {
    const folder = join(work, `campaign-${count}`);
    await mkdir(folder);
    await writePlainFolder(folder, count, Number(values.rows));
    const ours: Timed[] = [];
    const peers: Timed[] = [];
    const runOurs = async () => {
      const out = join(work, 'out');
      await rm(out, { recursive: true, force: true });
      const timed = measure([process.execPath, cli, 'run', folder, '--out', out, '--quiet']);
      timed.stages = (JSON.parse(readFileSync(join(out, 'run.json'), 'utf8')) as { timings: unknown }).timings;
      ours.push(timed);
    };
    const runPeer = () => {
      if (existsSync(values.peer)) peers.push(measure(['python3', values.peer, folder]));
    };
    for (let round = 0; round < Number(values.rounds); round++) {
      if (round % 2) {
        runPeer();
        await runOurs();
      } else {
        await runOurs();
        runPeer();
      }
    }
    const stages = ownStages(folder, count);
    const wall = median(ours.map((o) => o.wall_s));
    console.log(
      `\n${count} samples × 10 scans × ${values.rows} rows, ${values.rounds} rounds, ${cpus().length} × ${cpus()[0].model}`,
    );
    console.log('ours', JSON.stringify(ours));
    console.log('peer', JSON.stringify(peers));
    console.log('ours, one thread, by stage', JSON.stringify(stages));
    const theirs = peers.length > 0 ? peerStages(folder) : undefined;
    if (theirs) {
      console.log('peer, one process, by stage', JSON.stringify(theirs));
      const ratios = Object.entries(stages).map(
        ([stage, s]) => `${stage.slice(0, -2)} ${(theirs[stage] / s).toFixed(2)}`,
      );
      console.log(`peer ÷ ours by stage, CPU: ${ratios.join(', ')}`);
      const ratio = (of: (t: Timed) => number) => (median(peers.map(of)) / median(ours.map(of))).toFixed(2);
      console.log(
        `median: ours ${wall.toFixed(2)} s; peer ÷ ours: wall ${ratio((t) => t.wall_s)}, CPU ${ratio((t) => t.cpu_s)}, memory ${ratio((t) => t.peak_mb)}`,
      );
    }
    record.push({ count, rows: Number(values.rows), node: process.version, ours, peers, stages, theirs });
  }
} finally {
  await rm(work, { recursive: true, force: true });
}
if (values.keep) await writeFile(values.keep, `${JSON.stringify(record, null, 1)}\n`);
