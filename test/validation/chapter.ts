import { markdownTable } from '../study/table.ts';
import { SOURCES, type Source } from './sources.ts';
import type { Check } from './validate.ts';

/** A check with the test file that made it. */
export interface PlacedCheck extends Check {
  file: string;
}

const DIGITS = 7;
/** Below this the difference is that of the last digits of the machine, which is no news. */
const NOISE = 1e-9;

function differenceOf({ expected, got }: Check): string {
  const difference = got - expected;
  const relative = expected === 0 ? Math.abs(difference) : Math.abs(difference / expected);
  if (relative < NOISE) return '< 1e-9';
  if (expected === 0) return difference.toExponential(0);
  // Small ones to one digit: the next is already that of the machine.
  return `${(100 * (difference / expected)).toPrecision(relative < 1e-5 ? 1 : 2)} %`;
}

const shown = (value: number): string => String(Number(value.toPrecision(DIGITS)));
const cell = (text: string): string => text.replaceAll('|', '\\|');

/** The line of one check. */
export const lineOf = (check: PlacedCheck): string =>
  `| ${[
    check.method,
    check.quantity,
    shown(check.expected),
    shown(check.got),
    differenceOf(check),
    `${SOURCES[check.source].text}${SOURCES[check.source].kind === 'computed' ? ' *' : ''}`,
    check.file,
  ]
    .map(cell)
    .join(' | ')} |`;

/** The test file that a line of the chapter comes from. */
export const fileOfLine = (line: string): string | undefined => /\| (test\/[^|]+\.test\.ts) \|$/.exec(line)?.[1];

const kindOf = (check: Check): Source['kind'] => SOURCES[check.source].kind;

/** Long runs are quoted: they do not fit into a suite. */
const LONG_RUNS =
  'Longer runs of the same tables, with the seed, stand in README under “Measured”: `npm run study -- round-trip --count 40 --seed 3`, `npm run study -- intervals --count 300 --seed 7`, `npm run study -- standards --count 1000`.';

/** The whole chapter from the checks and tables of the tests. */
export function writeChapter(
  checks: readonly PlacedCheck[],
  tables: readonly { title: string; text: string }[],
): string {
  const sorted = [...checks].sort(
    (a, b) => a.method.localeCompare(b.method, 'en') || a.file.localeCompare(b.file, 'en'),
  );
  const used = [...new Set(checks.map((check) => check.source))];
  const outside = used.filter((name) => SOURCES[name].kind !== 'memory');
  const count = (kind: Source['kind']) => checks.filter((check) => kindOf(check) === kind).length;
  const methods = [...new Set(sorted.map((check) => check.method))];
  return `# Validation

Every number below is asserted by a test; \`npm run validation\` runs those tests and writes this page, and \`npm test\` compares it.
${checks.length} checks of ${methods.length} methods: ${count('printed')} against numbers in print, ${count('computed')} against numbers computed apart from this project (marked *), ${count('memory')} from memory only.
${outside.length} outside sources, ${used.length - outside.length} from memory.

## Against outside sources

| method | what | expected | got | difference | source | test |
| --- | --- | --- | --- | --- | --- | --- |
${sorted.map(lineOf).join('\n')}

## Checks by method

${markdownTable(
  ['method', 'checks', 'sources', 'largest difference'],
  methods.map((method) => {
    const own = sorted.filter((check) => check.method === method);
    const worst = own.reduce((a, b) => (relativeOf(b) > relativeOf(a) ? b : a));
    return [cell(method), own.length, new Set(own.map((check) => check.source)).size, differenceOf(worst)];
  }),
)}

Without a number from outside, held to simulated truth and identities only: shared_law and the verdict, area (enthalpy), moynihan (fragility from Tg against rate), reduction of curves, coverage, advice.

## Against simulated truth

Synthetic data from \`test/study/generator\`, which shares no code with the product; small runs with a fixed seed. ${LONG_RUNS}

${tables.map(({ title, text }) => `### ${title}\n\n${text.replaceAll(/^#+ /gm, '#### ')}`).join('\n\n')}
`;
}

const relativeOf = ({ expected, got }: Check): number => Math.abs((got - expected) / (expected || 1));
