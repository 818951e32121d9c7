import type { PlantedFlaw, SampleTruth } from '../simulate/index.ts';
import type { ResultRow } from '../store/index.ts';
import { findHeadline, HEADLINES, type Headline, withInterval } from './headline.ts';
import { shortNumber, textTable } from './text-table.ts';

/** What the demo promises of itself: the deviations that the methods keep to on its data, fractions of the truth. */
const TOLERANCES = { activation_energy: 0.02, avrami_exponent: 0.05 } as const;

export interface DemoResults {
  parameters: readonly ResultRow[];
  /** Rows of flags.csv and gaps.csv */
  flags: readonly ResultRow[];
  gaps: readonly ResultRow[];
}

export interface DemoVerdict {
  text: string;
  /** What is missing or too far off, one sentence each */
  failures: string[];
}

/** Recovered numbers beside the truth, and planted flaws beside the flags that they raised. */
export function compareWithTruth(
  truth: readonly SampleTruth[],
  flaws: readonly PlantedFlaw[],
  results: DemoResults,
): DemoVerdict {
  const failures: string[] = [];
  const rows = truth.flatMap((sample) =>
    HEADLINES.map((headline) => compareOne(sample, headline, results.parameters, failures)),
  );
  const table = textTable(
    [
      { title: 'sample' },
      { title: 'quantity' },
      { title: 'method' },
      { title: 'found [95 %]', right: true },
      { title: 'truth', right: true },
      { title: 'deviation', right: true },
    ],
    rows,
  );
  const flawRows = flaws.map((flaw) => {
    const found = isFlagged(flaw, results);
    if (!found) failures.push(`planted flaw not flagged: ${flaw.code} on ${flaw.file ?? flaw.sample}`);
    return [flaw.sample, flaw.sentence, flaw.code, found ? 'yes' : 'NO'];
  });
  const flawTable = textTable(
    [{ title: 'sample' }, { title: 'planted flaw' }, { title: 'flag' }, { title: 'raised' }],
    flawRows,
  );
  return { text: `${table}\n${bentSentences(truth)}\n${flawTable}`, failures };
}

function compareOne(
  sample: SampleTruth,
  headline: Headline,
  parameters: readonly ResultRow[],
  failures: string[],
): string[] {
  const { quantity, method } = headline;
  const found = findHeadline(parameters, sample.sample, headline);
  const isEnergy = quantity === 'activation_energy';
  const unit = isEnergy ? ' kJ/mol' : '';
  const energies = sample.localEnergies.map((e) => e.energyKJPerMol);
  const [low, high] = isEnergy
    ? [Math.min(...energies), Math.max(...energies)]
    : [sample.avramiExponent, sample.avramiExponent];
  const truth = low === high ? shortNumber(low) : `${shortNumber(low, 3)}–${shortNumber(high, 3)}`;
  const head = [sample.sample, isEnergy ? 'activation energy' : 'Avrami exponent', method];
  if (!found) {
    failures.push(`${sample.sample}: no ${quantity} by ${method}`);
    return [...head, 'missing', `${truth}${unit}`, ''];
  }
  const value = found.value as number;
  // A bent law has no one energy, nor does a straight law fit its curves: its numbers are shown, its energies held to the local range.
  const deviation =
    value < low ? value / low - 1 : value > high ? value / high - 1 : low === high ? value / low - 1 : 0;
  const bent = sample.energyKJPerMol === undefined;
  if (Math.abs(deviation) > TOLERANCES[quantity] && !(bent && !isEnergy)) {
    failures.push(`${sample.sample}: ${quantity} by ${method} is off by ${percent(deviation)}`);
  }
  return [
    ...head,
    withInterval(found),
    `${truth}${unit}`,
    low !== high && deviation === 0 ? 'within' : percent(deviation),
  ];
}

const percent = (fraction: number): string => `${fraction >= 0 ? '+' : '−'}${Math.abs(fraction * 100).toFixed(2)} %`;

function bentSentences(truth: readonly SampleTruth[]): string {
  return truth
    .filter((t) => t.energyKJPerMol === undefined)
    .map(({ sample, localEnergies }) => {
      const points = localEnergies.map((e) => `${e.energyKJPerMol.toFixed(0)} at ${e.temperatureK.toFixed(0)} K`);
      return `${sample} follows a bent law: its true local activation energy in kJ/mol is ${points.join(', ')}.\n`;
    })
    .join('');
}

function isFlagged(flaw: PlantedFlaw, { flags, gaps }: DemoResults): boolean {
  if (flaw.file === undefined) return gaps.some((row) => row.code === flaw.code && row.sample === flaw.sample);
  return flags.some((row) => row.code === flaw.code && row.file === flaw.file);
}
