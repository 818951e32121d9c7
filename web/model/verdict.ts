import type { VerdictRow } from '../../schema/wire/verdicts.ts';
import { formatEstimate, formatFixed, formatRate, formatSignificant, type Units } from '../format.ts';
import { sentence } from '../words.ts';

const OPENINGS: Record<VerdictRow['verdict'], string> = {
  straight: 'One straight law holds over all rates.',
  instrument: 'The bend of the Kissinger plot is made by an instrument’s lag, not by the material.',
  material:
    'The material itself bends: its activation energy changes with temperature, and no lag of an instrument makes this bend.',
  undecided: 'Whether the bend is the material’s or an instrument’s is not decided.',
};

/** A verdict in sentences: what it says, the bend with its interval, the energies at both ends, what would decide it. */
export function describeVerdict(row: VerdictRow, units: Units): string {
  const { verdict, bend, bend_lower99: lower, bend_upper99: upper, p_value: p } = row;
  const sentences = [OPENINGS[verdict]];
  if (bend !== null) {
    const { value, spread } = formatEstimate(bend, lower, upper);
    const of = `${row.instruments.join(', ')}, ${formatRate(row.rate_min_K_per_s, units)} to ${formatRate(row.rate_max_K_per_s, units)}`;
    sentences.push(`Bend B = ${value} ${spread} (99 % interval; 0 is straight) on ${of}.`);
  }
  const { energy_low_rate_kJ_per_mol: slow, energy_high_rate_kJ_per_mol: fast } = row;
  if (verdict !== 'straight' && slow !== null && fast !== null) {
    sentences.push(
      `E is ${formatSignificant(slow)} kJ/mol at the slow end and ${formatSignificant(fast)} kJ/mol at the fast end.`,
    );
  }
  if (p !== null) sentences.push(`p ${p < 0.001 ? '< 0.001' : `= ${formatFixed(p, 3)}`} for a straight law.`);
  if (row.decides_next !== '') sentences.push(sentence(`To decide it: ${row.decides_next}.`.replace(/\.\.$/, '.')));
  return sentences.join(' ');
}
