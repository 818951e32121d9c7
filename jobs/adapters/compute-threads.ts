import { fileURLToPath } from 'node:url';
import { Piscina } from 'piscina';
import type { Compute } from '../ports/index.ts';
import { transferableBuffers } from './transfer.ts';

// In the built package a thread's file lies beside this one; run from the sources it needs the TypeScript loader first.
const fromSources = import.meta.url.endsWith('.ts');
const THREAD_FILE = fileURLToPath(
  new URL(fromSources ? './compute-thread.ts' : './compute-thread.js', import.meta.url),
);
const loaderOf = (file: string) =>
  file.endsWith('.ts') ? ['--import', new URL('./typescript-loader.mjs', import.meta.url).href] : [];

/** Room for short-lived objects of a thread, MB: half of the default, no slower, and about 30 MB less a thread. */
const YOUNG_MB = 24;

/**
 * The computations in `workers` threads. A thread that dies or runs out of memory rejects its task and is replaced.
 * Rejects when a thread cannot load `file`. Where a replacement cannot load it the pool is given up and every task says so:
 * an idle thread sleeps, so one that dies without a task died loading, and the pool would let further tasks wait for ever.
 */
export async function openComputeThreads(workers: number, file = THREAD_FILE): Promise<Compute> {
  const pool = new Piscina({
    filename: file,
    execArgv: loaderOf(file),
    minThreads: workers,
    maxThreads: workers,
    resourceLimits: { maxYoungGenerationSizeMb: YOUNG_MB },
  });
  let broken: Error | undefined;
  const giveUp = (cause: unknown) => {
    const said = cause instanceof Error ? cause.message : String(cause);
    broken ??= new Error(
      `the computing threads cannot load ${file}; install the package whole or build it again: ${said}`,
      { cause },
    );
    return pool.destroy();
  };
  pool.on('error', (error) => void giveUp(error));
  try {
    await pool.run(undefined, { name: 'ready' });
  } catch (error) {
    await giveUp(error);
  }
  if (broken) throw broken;
  const run = (name: string, task: object) => {
    if (broken) return Promise.reject(broken);
    return pool.run(task, { name, transferList: transferableBuffers(task) });
  };
  return {
    readScan: (bytes, file) => run('readScan', { bytes, file }),
    reduceScan: (scan, input) => run('reduceScan', { scan, input }),
    fitSample: (input) => run('fitSample', { input }),
    judgeCurvature: (input) => run('judgeCurvature', { input }),
    forecastSample: (input) => run('forecastSample', { input }),
    close: () => pool.destroy(),
  };
}
