import { fileURLToPath } from 'node:url';
import { Piscina } from 'piscina';
import type { Compute } from '../ports/index.ts';
import { transferableBuffers } from './transfer.ts';

/** The computations in `workers` threads. A thread that dies or runs out of memory rejects its task and is replaced. */
export function createComputeThreads(workers: number): Compute {
  // In the built package a thread's file lies beside this one; run from the sources it needs the TypeScript loader first.
  const fromSources = import.meta.url.endsWith('.ts');
  const pool = new Piscina({
    filename: fileURLToPath(new URL(fromSources ? './compute-thread.ts' : './compute-thread.js', import.meta.url)),
    execArgv: fromSources ? ['--import', new URL('./typescript-loader.mjs', import.meta.url).href] : [],
    minThreads: workers,
    maxThreads: workers,
  });
  const run = (name: string, task: object) => pool.run(task, { name, transferList: transferableBuffers(task) });
  return {
    readScan: (bytes, file) => run('readScan', { bytes, file }),
    reduceScan: (scan, input) => run('reduceScan', { scan, input }),
    fitSample: (input) => run('fitSample', { input }),
    close: () => pool.destroy(),
  };
}
