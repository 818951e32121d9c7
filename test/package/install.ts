import { spawn } from 'node:child_process';
import { existsSync } from 'node:fs';
import { mkdir, mkdtemp, readdir, readFile, rm, writeFile } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';

const root = fileURLToPath(new URL('../..', import.meta.url));

/** A consumer's own program: types from the package, the code of the package run. */
const CONSUMER = `import { Client, type CampaignStatus } from 'ratespan/client';
const api = new Client(process.argv[2]);
const { items } = await api.call('listCampaigns', {});
const status: CampaignStatus = await api.whenSettled(items[0].id);
let rows = 0;
for await (const row of api.items('listParameters', { id: items[0].id })) rows += row.value > 0 ? 1 : 0;
console.log(status.settled, rows > 100);
`;

interface Ran {
  code: number | null;
  out: string;
}

function run(command: string, args: readonly string[], cwd: string): Promise<Ran> {
  // NODE_ENV as on a server; no setting of this checkout reaches the installed program.
  const env = { ...process.env, NODE_ENV: 'production', RATESPAN_DATA: '', RATESPAN_URL: '' };
  const child = spawn(command, args, { cwd, env, stdio: ['ignore', 'pipe', 'pipe'] });
  let out = '';
  for (const stream of [child.stdout, child.stderr]) stream.on('data', (chunk) => (out += chunk));
  return new Promise((resolve) => child.on('close', (code) => resolve({ code, out })));
}

/** Starts the installed `serve`, asks it by the installed client, stops it. */
async function serveAndAsk(folder: string): Promise<string> {
  const stores = join(folder, 'data/demo');
  const [store] = (await readdir(stores)).filter((name) => name.startsWith('store'));
  const env = { ...process.env, RATESPAN_DATA: join(stores, store) };
  // The program itself, not npx: a signal must reach it.
  const server = spawn(process.execPath, [join(folder, 'node_modules/ratespan/dist/cli.js'), 'serve', '--port', '0'], {
    cwd: folder,
    env,
    stdio: ['ignore', 'pipe', 'pipe'],
  });
  try {
    const url = await new Promise<string>((resolve, reject) => {
      let text = '';
      const look = (chunk: Buffer) => {
        text += chunk;
        const [found] = /http:\/\/127\.0\.0\.1:\d+/.exec(text) ?? [];
        if (found) resolve(found);
      };
      server.stdout.on('data', look);
      server.stderr.on('data', look);
      server.on('close', () => reject(new Error(`serve ended: ${text}`)));
    });
    const page = await (await fetch(url)).text();
    if (!page.includes('<title>')) throw new Error('serve has no page');
    const asked = await run(process.execPath, ['consumer.js', url], folder);
    if (asked.code !== 0 || asked.out.trim() !== 'true true') throw new Error(`the client printed: ${asked.out}`);
    return asked.out.trim();
  } finally {
    const gone = new Promise((resolve) => server.on('close', resolve));
    server.kill('SIGINT');
    await gone;
  }
}

/**
 * `npm pack`, installed in an empty folder without development packages: demo, run, serve and the typed client work from the tarball.
 * Throws where one does not. @returns one line a step
 */
export async function tryPackage(): Promise<string[]> {
  const place = await mkdtemp(join(tmpdir(), 'ratespan-package-'));
  const lines: string[] = [];
  const step = async (name: string, command: string, args: readonly string[], cwd: string): Promise<string> => {
    const { code, out } = await run(command, args, cwd);
    if (code !== 0) throw new Error(`${name} ended with ${code}:\n${out}`);
    lines.push(`${name}: done`);
    return out;
  };
  try {
    await step('npm pack', 'npm', ['pack', '--pack-destination', place], root);
    const [tarball] = (await readdir(place)).filter((name) => name.endsWith('.tgz'));
    const folder = join(place, 'empty');
    await mkdir(folder);
    await writeFile(join(folder, 'package.json'), '{ "name": "empty", "private": true, "type": "module" }');
    await step(
      'npm install',
      'npm',
      ['install', '--omit=dev', '--no-audit', '--no-fund', join(place, tarball)],
      folder,
    );
    for (const name of ['tsx', 'vite', 'typescript', 'esbuild'])
      if (existsSync(join(folder, 'node_modules', name))) throw new Error(`${name} came along`);
    await step('ratespan demo --once', 'npx', ['ratespan', 'demo', '--once', '--quiet'], folder);
    const results = join(folder, 'results');
    await step('ratespan run', 'npx', ['ratespan', 'run', 'data/demo/campaign', '--out', results, '--quiet'], folder);
    const written = await readdir(results);
    for (const name of ['parameters.csv', 'report.html', 'run.json'])
      if (!written.includes(name)) throw new Error(`run wrote no ${name}: ${written.join(' ')}`);
    const report = await readFile(join(results, 'report.html'), 'utf8');
    if (!report.includes('</html>')) throw new Error('the report is cut');
    await writeFile(join(folder, 'consumer.ts'), CONSUMER);
    const tsc = join(root, 'node_modules/.bin/tsc');
    const flags = ['--strict', '--module', 'nodenext', '--target', 'es2023', '--lib', 'es2023,dom,dom.asynciterable'];
    const types = ['--types', 'node', '--typeRoots', join(root, 'node_modules/@types')];
    await step('types of the client', tsc, ['consumer.ts', ...flags, ...types], folder);
    lines.push(`serve, page and client: ${await serveAndAsk(folder)}`);
    return lines;
  } finally {
    await rm(place, { recursive: true, force: true });
  }
}
