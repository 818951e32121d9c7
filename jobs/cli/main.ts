#!/usr/bin/env node
import { parseVerbArguments } from './arguments.ts';
import { EXIT, Interrupted, ServerError, UsageError } from './exit.ts';
import { generalHelp, VERBS, type VerbName, verbHelp } from './help.ts';
import { createTerminal, type Terminal } from './terminal.ts';
import { VERSION } from './version.ts';

type Values = Record<string, string | boolean | undefined>;
type Verb = (positionals: string[], values: Values, terminal: Terminal) => Promise<number>;

/** Loaded when asked for, so that help and `table` do not wait for the whole server. */
const IMPLEMENTATIONS: Record<VerbName, () => Promise<Verb>> = {
  serve: async () => (await import('./verbs/serve.ts')).serve,
  work: async () => (await import('./verbs/work.ts')).work,
  run: async () => (await import('./verbs/run.ts')).run,
  send: async () => (await import('./verbs/send.ts')).send,
  table: async () => (await import('./verbs/table.ts')).table,
  demo: async () => (await import('./verbs/demo.ts')).demo,
};

async function runCommandLine(args: string[], interrupt: AbortSignal): Promise<number> {
  const [verb, ...rest] = args;
  if (verb === '--help' || verb === '-h' || verb === 'help') {
    process.stdout.write(generalHelp());
    return EXIT.done;
  }
  if (verb === '--version') {
    process.stdout.write(`${VERSION}\n`);
    return EXIT.done;
  }
  const known = Object.keys(VERBS).join(', ');
  if (verb === undefined) throw new UsageError(`a verb is missing (${known}); see: ratespan --help`);
  if (!Object.hasOwn(VERBS, verb)) {
    throw new UsageError(`unknown verb ${JSON.stringify(verb)}; known: ${known}; see: ratespan --help`);
  }
  const name = verb as VerbName;
  const { values, positionals } = parseVerbArguments(name, rest);
  if (values.help) {
    process.stdout.write(verbHelp(name));
    return EXIT.done;
  }
  const implementation = await IMPLEMENTATIONS[name]();
  return implementation(positionals, values, createTerminal(interrupt, values.quiet === true));
}

function exitCodeOf(error: unknown): number {
  if (error instanceof Interrupted) {
    process.stderr.write('interrupted; the same command again goes on from here\n');
    return EXIT.interrupted;
  }
  if (error instanceof UsageError || error instanceof ServerError) {
    process.stderr.write(`ratespan: ${error.message}\n`);
    return error instanceof UsageError ? EXIT.usage : EXIT.server;
  }
  process.stderr.write(
    `ratespan: internal error: ${error instanceof Error ? (error.stack ?? error.message) : error}\n`,
  );
  return EXIT.failed;
}

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

process.exitCode = await runCommandLine(process.argv.slice(2), interrupt.signal).catch(exitCodeOf);
