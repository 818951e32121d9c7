import { type ParseArgsConfig, parseArgs } from 'node:util';
import { UsageError } from './exit.ts';
import { HELP_OPTION, VERBS, type VerbHelp, type VerbName } from './help.ts';

type Options = NonNullable<ParseArgsConfig['options']>;

export interface ParsedArguments {
  values: Record<string, string | boolean | undefined>;
  positionals: string[];
}

/** Reads the arguments of a verb by its entry in VERBS. Throws UsageError that says how to see the help. */
export function parseVerbArguments(verb: VerbName, args: string[]): ParsedArguments {
  const { options, positionals: wanted, optional }: VerbHelp = VERBS[verb];
  const parserOptions: Options = { ...HELP_OPTION };
  for (const [name, option] of Object.entries(options)) {
    parserOptions[name] = { type: 'value' in option ? 'string' : 'boolean' };
  }
  let parsed: ParsedArguments;
  try {
    parsed = parseArgs({ args, options: parserOptions, allowPositionals: true, strict: true }) as ParsedArguments;
  } catch (error) {
    // node:util explains at length how to escape a leading dash; its first sentence is enough.
    throw wrongUsage(verb, (error as Error).message.split(/[.\n]/)[0]);
  }
  if (parsed.values.help) return parsed;
  if (parsed.positionals.length < wanted.length) {
    throw wrongUsage(verb, `${wanted[parsed.positionals.length]} is missing`);
  }
  const most = wanted.length + (optional === undefined ? 0 : 1);
  if (parsed.positionals.length > most) {
    const extra = JSON.stringify(parsed.positionals[most]);
    throw wrongUsage(verb, `${extra} is one argument too many`);
  }
  return parsed;
}

export function wrongUsage(verb: VerbName, what: string): UsageError {
  return new UsageError(`${verb}: ${what}; see: ratespan ${verb} --help`);
}

/** A whole number within [low, high], or the default when the option is absent. */
export function wholeNumber(
  verb: VerbName,
  name: string,
  written: string | boolean | undefined,
  [low, high]: readonly [number, number],
): number | undefined {
  if (written === undefined) return undefined;
  const value = Number(written);
  if (typeof written === 'string' && /^\d+$/.test(written) && value >= low && value <= high) return value;
  throw wrongUsage(verb, `--${name} takes a whole number from ${low} to ${high}, not ${JSON.stringify(written)}`);
}
