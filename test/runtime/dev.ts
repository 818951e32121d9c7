import { existsSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { startRuntime } from './start-runtime.ts';

/**
 * `npm run dev:serverless`: the serverless program by hand, in the real runtime, over stores that end with it.
 * The page is the built one where there is one.
 */
const page = fileURLToPath(new URL('../../dist/web', import.meta.url));
const runtime = await startRuntime({ pagesDir: existsSync(page) ? page : undefined, port: 8788 });
process.stdout.write(
  `serverless program on ${runtime.url}\ntoken of a keeper: ${runtime.token}\nCtrl+C stops it and forgets everything\n`,
);
// What a cron trigger does when deployed.
const cron = setInterval(async () => {
  const worker = await runtime.miniflare.getWorker();
  await worker.scheduled({ cron: '*/5 * * * *' });
}, 300_000);
process.once('SIGINT', async () => {
  clearInterval(cron);
  await runtime.close();
  process.exit(0);
});
