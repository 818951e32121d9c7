import { mkdtemp, readFile, rm, writeFile } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, expect, it } from 'vitest';
import { openComputeThreads } from '../../jobs/adapters/compute-threads.ts';

const folder = await mkdtemp(join(tmpdir(), 'ratespan-threads-'));
afterAll(() => rm(folder, { recursive: true, force: true }));

async function threadFile(name: string, text: string): Promise<string> {
  const path = join(folder, name);
  await writeFile(path, text);
  return path;
}

it('threads that cannot load their file are refused at once, and the refusal names the file', async () => {
  const path = await threadFile('broken.mjs', "throw new Error('half an installation');");
  await expect(openComputeThreads(2, path)).rejects.toThrow(
    /cannot load .*broken\.mjs.*build it again: half an installation/,
  );
  await expect(openComputeThreads(1, join(folder, 'absent.mjs'))).rejects.toThrow(/cannot load .*absent\.mjs/);
});

it('a replacement that cannot load its file ends every task with the reason, instead of letting it wait', async () => {
  const gone = join(folder, 'gone');
  const path = await threadFile(
    'vanishing.mjs',
    `import { existsSync } from 'node:fs';
    if (existsSync(${JSON.stringify(gone)})) throw new Error('half an update');
    export const ready = () => true;
    export const readScan = () => process.exit(3);`,
  );
  const threads = await openComputeThreads(1, path);
  await writeFile(gone, '');
  await expect(threads.readScan(new Uint8Array(1), 'a.txt')).rejects.toThrow(/exited with code: 3/);
  const message = () => threads.readScan(new Uint8Array(1), 'a.txt').catch((error: Error) => error.message);
  await expect.poll(message, { timeout: 15_000 }).toMatch(/cannot load .*vanishing\.mjs.*half an update/);
  await threads.close();
});

it('threads that can never load again are given up after a few starts, whatever is asked of them', async () => {
  const [gone, starts] = [join(folder, 'gone-for-good'), join(folder, 'starts')];
  const path = await threadFile(
    'counted.mjs',
    `import { appendFileSync, existsSync } from 'node:fs';
    appendFileSync(${JSON.stringify(starts)}, 'x');
    if (existsSync(${JSON.stringify(gone)})) throw new Error('half an update');
    export const ready = () => true;
    export const readScan = () => process.exit(3);`,
  );
  const threads = await openComputeThreads(2, path);
  await writeFile(gone, '');
  const asked: Promise<unknown>[] = [];
  for (let n = 0; n < 40; n++) {
    asked.push(threads.readScan(new Uint8Array(1), 'a.txt').catch((error) => error));
    await new Promise((resolve) => setTimeout(resolve, 25));
  }
  expect((await Promise.all(asked)).every((answer) => answer instanceof Error)).toBe(true);
  // Two at the start; each that died at a task or at loading, and those under way when the pool was given up.
  expect((await readFile(starts, 'utf8')).length).toBeLessThanOrEqual(8);
  await threads.close();
});

it('a thread that dies at a task rejects it and is replaced', async () => {
  const path = await threadFile(
    'mortal.mjs',
    "export const ready = () => true; export const readScan = ({ file }) => (file === 'die' ? process.exit(3) : { ok: false });",
  );
  const threads = await openComputeThreads(1, path);
  await expect(threads.readScan(new Uint8Array(1), 'die')).rejects.toThrow(/exited with code: 3/);
  expect(await threads.readScan(new Uint8Array(1), 'live')).toEqual({ ok: false });
  await threads.close();
});
