import { wholeNumber } from '../arguments.ts';
import { observeOnStderr, storesFromEnvironment } from '../environment.ts';
import { EXIT } from '../exit.ts';
import { startEverything, untilInterrupted } from '../server.ts';
import type { Terminal } from '../terminal.ts';

/** `serve`: API, dashboard and job runner until Ctrl+C, which is its normal end. */
export async function serve(
  _positionals: string[],
  values: Record<string, string | boolean | undefined>,
  terminal: Terminal,
): Promise<number> {
  const stores = storesFromEnvironment();
  const server = await startEverything(
    'serve',
    {
      stores,
      port: wholeNumber('serve', 'port', values.port, [0, 65_535]) ?? 8787,
      host: String(values.host ?? '127.0.0.1'),
      workers: wholeNumber('serve', 'workers', values.workers, [0, 256]),
      anyPort: false,
      page: true,
      observer: observeOnStderr(),
    },
    terminal,
  );
  terminal.out(`ratespan on ${server.url}\n`);
  terminal.note(`data in ${stores.databaseUrl ?? stores.dataDir}; Ctrl+C stops`);
  await untilInterrupted(terminal);
  await server.stop();
  return EXIT.done;
}
