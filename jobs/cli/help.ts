/** The verbs with their arguments: parsing and help both come from this table. An option without `value` is a switch. */
interface OptionHelp {
  value?: string;
  text: string;
}

export interface VerbHelp {
  summary: string;
  positionals: readonly string[];
  /** A last argument that may be left out. */
  optional?: string;
  options: Readonly<Record<string, OptionHelp>>;
  /** Shown at the end of the verb's own help. */
  remarks?: readonly string[];
}

export const HELP_OPTION = { help: { type: 'boolean', short: 'h' } } as const;

const WORKERS: OptionHelp = { value: 'N', text: 'worker threads for the computations (default: the cores)' };
const QUIET: OptionHelp = { text: 'no progress, no summary; errors only' };
const JSON_SWITCH: OptionHelp = { text: 'the summary as JSON on standard output' };
const DB: OptionHelp = { value: 'FILE', text: 'database file, with blobs/ beside it' };
const TO: OptionHelp = { value: 'URL', text: 'a server (default: RATESPAN_URL)' };
const TOKEN: OptionHelp = { value: 'T', text: 'access token (default: RATESPAN_TOKEN)' };

export const VERBS = {
  serve: {
    summary: 'API, dashboard and job runner on one database',
    positionals: [],
    options: {
      port: { value: '8787', text: 'port; 0 takes a free one' },
      host: { value: '127.0.0.1', text: 'address to listen on' },
      workers: WORKERS,
    },
  },
  work: {
    summary: 'job runner alone, against the same database (several may run)',
    positionals: [],
    options: { workers: WORKERS },
  },
  run: {
    summary: 'the whole job without a server: read a folder, write the result files',
    positionals: ['FOLDER'],
    options: {
      out: { value: 'DIR', text: 'folder for the result files (needed, except with --dry)' },
      db: { value: 'FILE', text: 'database file (default: DIR/ratespan.db), with blobs/ beside it' },
      workers: WORKERS,
      quiet: QUIET,
      json: JSON_SWITCH,
      dry: { text: 'say how each file and column would be understood; compute and write nothing' },
    },
    remarks: [
      'The same command again resumes and recomputes nothing that is there already.',
      'The results describe FOLDER as it is now. A folder below FOLDER that holds a run.json is not read.',
    ],
  },
  send: {
    summary: 'upload a folder to a server; sending again is harmless',
    positionals: ['FOLDER'],
    options: {
      campaign: { value: 'NAME', text: 'campaign to send to, made if missing (needed)' },
      to: { value: 'URL', text: 'the server (default: RATESPAN_URL, else http://127.0.0.1:8787)' },
      token: TOKEN,
      wait: { text: 'follow the jobs until the campaign is settled' },
      quiet: QUIET,
      json: JSON_SWITCH,
    },
  },
  table: {
    summary: 'print the consolidated kinetic parameters',
    positionals: ['CAMPAIGN'],
    options: {
      format: { value: 'csv|json', text: 'csv unless told otherwise' },
      db: DB,
      to: TO,
      token: TOKEN,
    },
    remarks: ['With neither --db nor --to (nor RATESPAN_URL), the local data folder is read.'],
  },
  forecast: {
    summary: 'one forecast: when, how far, or how hot, with its 95 % band',
    positionals: ['CAMPAIGN'],
    options: {
      sample: { value: 'S', text: 'the sample (needed)' },
      temperature: { value: 'C', text: 'a constant temperature, °C' },
      program: { value: 'FILE', text: 'a temperature programme: time [..], temperature [..]' },
      conversion: { value: 'X', text: 'a conversion between 0 and 1' },
      time: { value: 'S', text: 'a time, s' },
      json: JSON_SWITCH,
      db: DB,
      to: TO,
      token: TOKEN,
    },
    remarks: [
      'temperature + conversion: the time to it; temperature + time: the conversion by then;',
      'conversion + time: the highest temperature that keeps below it; program: the conversion at its end;',
      'program + conversion: the time to it on the programme. Below zero: --temperature=-20.',
    ],
  },
  token: {
    summary: 'access tokens: make one, list them, take one back',
    positionals: ['add|list|revoke'],
    optional: 'ID',
    options: {
      lab: { value: 'L', text: 'add: the lab that it belongs to and sees (a-z, 0-9, -)' },
      role: { value: 'reader|sender|keeper', text: 'add: reads; also sends and corrects; also deletes' },
      days: { value: '365', text: 'add: days until it no longer counts' },
    },
    remarks: [
      'Works on the database of the data folder, never over the network.',
      'A token is shown once and stored hashed.',
    ],
  },
  backup: {
    summary: 'database and blobs into one archive (a gzipped tar), while a server runs',
    positionals: ['FILE'],
    options: { quiet: QUIET },
  },
  restore: {
    summary: 'put a backup into an empty data folder (RATESPAN_DATA)',
    positionals: ['FILE'],
    options: { quiet: QUIET },
  },
  demo: {
    summary: 'synthetic campaign with known truth through the real server; leaves the dashboard up',
    positionals: [],
    options: {
      once: { text: 'exit when the table is printed' },
      port: { value: '8787', text: 'port; a free one if that is taken' },
      workers: WORKERS,
      quiet: { text: 'no progress' },
    },
    remarks: ['Writes under data/demo only.'],
  },
} as const satisfies Record<string, VerbHelp>;

export type VerbName = keyof typeof VERBS;

const ENVIRONMENT: readonly [string, string][] = [
  ['RATESPAN_DATA', 'data folder (default ./data)'],
  ['RATESPAN_DB_URL', 'database: a file path or a remote libSQL URL'],
  ['RATESPAN_DB_TOKEN', 'token of a remote database'],
  ['RATESPAN_BLOBS', 'folder of originals and curves'],
  ['RATESPAN_URL', 'server for send, table and forecast'],
  ['RATESPAN_TOKEN', 'access token for send, table and forecast'],
];

const aligned = (rows: readonly (readonly [string, string])[]): string[] => {
  const width = Math.max(...rows.map(([name]) => name.length)) + 2;
  return rows.map(([name, text]) => `  ${name.padEnd(width)}${text}`);
};

/** Characters of a line of usage, at most. */
const USAGE_WIDTH = 100;

function usageOf(verb: VerbName): string {
  const { positionals, optional, options } = VERBS[verb] as VerbHelp;
  const parts = Object.entries(options).map(([name, { value }]) => `[--${name}${value ? ` ${value}` : ''}]`);
  const words = ['ratespan', verb, ...positionals, ...(optional ? [`[${optional}]`] : []), ...parts];
  return words.reduce((text, word) => {
    const line = text.slice(text.lastIndexOf('\n') + 1);
    return line.length + word.length < USAGE_WIDTH ? `${text} ${word}` : `${text}\n    ${word}`;
  });
}

export function verbHelp(verb: VerbName): string {
  const { summary, options, remarks = [] } = VERBS[verb] as VerbHelp;
  const rows = Object.entries(options).map(
    ([name, { value, text }]) => [`--${name}${value ? ` ${value}` : ''}`, text] as const,
  );
  return `${[usageOf(verb), '', `  ${summary}`, '', ...aligned(rows), ...(remarks.length ? ['', ...remarks] : [])].join('\n')}\n`;
}

export function generalHelp(): string {
  const verbs = Object.entries(VERBS).map(([name, { summary }]) => [name, summary] as const);
  return `${[
    'ratespan: crystallisation kinetics of glasses from heating scans over many decades of rate',
    '',
    'usage: ratespan VERB [arguments]; ratespan VERB --help says more',
    '',
    ...aligned(verbs),
    '',
    'environment',
    ...aligned(ENVIRONMENT),
    '',
    'exit codes: 0 done; 1 a job failed or an internal error; 2 wrong usage or an unreadable folder;',
    '3 finished, but no sample could be fitted; 4 server unreachable or refused; 130 interrupted',
  ].join('\n')}\n`;
}
