#!/usr/bin/env node
import { runCommandLine } from './command-line.ts';
import { EXIT, Interrupted } from './exit.ts';
import { createTerminal } from './terminal.ts';

const interrupt = new AbortController();
for (const signal of ['SIGINT', 'SIGTERM'] as const) {
  process.on(signal, () => {
    // A second signal means: now.
    if (interrupt.signal.aborted) process.exit(EXIT.interrupted);
    interrupt.abort(new Interrupted(signal));
  });
}
// `ratespan table … | head` closes our standard output early; that is no error.
process.stdout.on('error', (error: NodeJS.ErrnoException) => {
  if (error.code === 'EPIPE') process.exit(EXIT.done);
  throw error;
});

process.exitCode = await runCommandLine(process.argv.slice(2), (quiet) => createTerminal(interrupt.signal, quiet));
