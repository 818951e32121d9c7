import { fileURLToPath } from 'node:url';
import { Piscina } from 'piscina';
import type { Compute } from '../ports/index.ts';
import { transferableBuffers } from './transfer.ts';

/** Threads that may die with nothing to do before the pool is given up. Replaced without end, they once took all memory. */
const IDLE_DEATHS = 5;

// In the built package a thread's file lies beside this one; run from the sources it needs the TypeScript loader first.
const fromSources = import.meta.url.endsWith('.ts');
const THREAD_FILE = fileURLToPath(
  new URL(fromSources ? './compute-thread.ts' : './compute-thread.js', import.meta.url),
);
const LOADER = fromSources ? ['--import', new URL('./typescript-loader.mjs', import.meta.url).href] : [];

/**
 * The computations in `workers` threads. A thread that dies or runs out of memory rejects its task and is replaced.
 * Rejects when a thread cannot even load `file`; a pool whose threads keep dying idle is given up, and every task then says so.
 */
export async function openComputeThreads(workers: number, file = THREAD_FILE): Promise<Compute> {
  const pool = new Piscina({ filename: file, execArgv: LOADER, minThreads: workers, maxThreads: workers });
  let deaths = 0;
  let broken: Error | undefined;
  const giveUp = (why: string, cause: unknown) => {
    broken = new Error(`the computing threads ${why}: ${cause instanceof Error ? cause.message : String(cause)}`, {
      cause,
    });
    return pool.destroy();
  };
  pool.on('error', (error) => {
    if (++deaths >= IDLE_DEATHS && !broken) void giveUp('die one after the other', error);
  });
  try {
    await pool.run(undefined, { name: 'ready' });
  } catch (error) {
    await giveUp(`cannot load ${file}; install the package whole or build it again`, error);
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
