import { parseArgs } from 'node:util';
import { STUDIES } from './registry.ts';

const USAGE = `usage: npm run study -- NAME [--count N] [--seed TEXT]
${Object.entries(STUDIES)
  .map(([name, { about }]) => `  ${name.padEnd(18)}${about}`)
  .join('\n')}`;

function fail(message: string): never {
  process.stderr.write(`${message}\n${USAGE}\n`);
  process.exit(2);
}

function readArguments() {
  try {
    return parseArgs({
      allowPositionals: true,
      options: { count: { type: 'string' }, seed: { type: 'string', default: '1' } },
    });
  } catch (error) {
    fail((error as Error).message);
  }
}

const { positionals, values } = readArguments();
const [name] = positionals;
const study = STUDIES[name ?? ''];
if (positionals.length !== 1 || !study) fail(`no study «${name ?? ''}»`);
const count = values.count === undefined ? undefined : Number(values.count);
if (count !== undefined && !(Number.isInteger(count) && count > 0))
  fail(`--count must be a whole number above 0: ${values.count}`);
const started = performance.now();
process.stdout.write(`${await study.run({ count, seed: values.seed })}\n\n`);
const seconds = ((performance.now() - started) / 1000).toFixed(1);
process.stdout.write(`study ${name}, seed ${values.seed}, ${seconds} s; all data synthetic\n`);
