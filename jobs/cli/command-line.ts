import { parseVerbArguments } from './arguments.ts';
import { EXIT, Interrupted, ServerError, UsageError } from './exit.ts';
import { generalHelp, VERBS, type VerbName, verbHelp } from './help.ts';
import type { Terminal } from './terminal.ts';
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
  forecast: async () => (await import('./verbs/forecast.ts')).forecast,
  token: async () => (await import('./verbs/token.ts')).token,
  backup: async () => (await import('./verbs/backup.ts')).backup,
  restore: async () => (await import('./verbs/restore.ts')).restore,
  demo: async () => (await import('./verbs/demo.ts')).demo,
};

/** Runs one command line to its exit code; whatever goes wrong is said on the terminal. */
export async function runCommandLine(args: string[], createTerminal: (quiet: boolean) => Terminal): Promise<number> {
  const terminal = createTerminal(false);
  return runVerb(args, terminal, createTerminal).catch((error: unknown) => exitCodeOf(error, terminal));
}

async function runVerb(
  args: string[],
  terminal: Terminal,
  createTerminal: (quiet: boolean) => Terminal,
): Promise<number> {
  const [verb, ...rest] = args;
  if (verb === '--help' || verb === '-h' || verb === 'help') {
    terminal.out(generalHelp());
    return EXIT.done;
  }
  if (verb === '--version') {
    terminal.out(`${VERSION}\n`);
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
    terminal.out(verbHelp(name));
    return EXIT.done;
  }
  const implementation = await IMPLEMENTATIONS[name]();
  return implementation(positionals, values, createTerminal(values.quiet === true));
}

function exitCodeOf(error: unknown, { warn }: Terminal): number {
  if (error instanceof Interrupted) {
    warn('interrupted; the same command again goes on from here');
    return EXIT.interrupted;
  }
  if (error instanceof UsageError || error instanceof ServerError) {
    warn(`ratespan: ${error.message}`);
    return error instanceof UsageError ? EXIT.usage : EXIT.server;
  }
  process.stderr.write(
    `ratespan: internal error: ${error instanceof Error ? (error.stack ?? error.message) : error}\n`,
  );
  return EXIT.failed;
}
