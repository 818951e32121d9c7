import type { DecidingScan, LagEvidence, VerdictRow } from '../../../schema/wire/verdicts.ts';
import { type Decision, LEAST_DEGREES, STRAIGHT_WITHIN } from './decide.ts';
import type { RivalShapes } from './shape-error.ts';

export const inWords = (rateKPerS: number): string =>
  rateKPerS < 1
    ? `${(rateKPerS * 60).toPrecision(3).replace(/\.?0+$/, '')} K/min`
    : `${Number(rateKPerS.toPrecision(3))} K/s`;

export const scansInWords = (scans: readonly DecidingScan[]): string =>
  scans
    .map((s) => `${s.scans} scan${s.scans === 1 ? '' : 's'} at ${inWords(s.rateKPerS)} on ${s.instrument}`)
    .join('; ');

const seconds = (s: number): string =>
  Math.abs(s) < 0.1 ? `${Number((s * 1e3).toPrecision(2))} ms` : `${Number(s.toPrecision(2))} s`;

export const lagInWords = (l: LagEvidence): string =>
  `${l.instrument} ${seconds(l.lagS)} ± ${seconds(l.lagErrorS)} (${l.allowedS > 0 ? `calibration allows ± ${seconds(l.allowedS)}` : 'nothing is known of it'})`;

/** What the verdict means, in plain words with its numbers; one thought a sentence. */
export function explain(
  row: VerdictRow,
  decision: Decision,
  lags: readonly LagEvidence[],
  deciding: readonly DecidingScan[],
): string[] {
  const span = `from ${inWords(row.rate_min_K_per_s)} to ${inWords(row.rate_max_K_per_s)}`;
  const names = row.instruments.join(' and ');
  const [low, high] = [row.energy_low_rate_kJ_per_mol, row.energy_high_rate_kJ_per_mol].map((v) =>
    v === null ? '–' : v.toFixed(0),
  );
  const [bend, from, to] = [row.bend, row.bend_lower99, row.bend_upper99].map((v) => v?.toFixed(2) ?? '–');
  const interval = `${bend} (99 % interval ${from} to ${to})`;
  const part = `${((Math.exp(STRAIGHT_WITHIN) - 1) * 100).toFixed(0)} %`;
  const beyond = lags.filter((l) => l.beyondCalibration).map(lagInWords);
  switch (decision.verdict) {
    case 'material':
      return [
        `The bend belongs to the material: the local activation energy goes from ${low} kJ/mol at the slow end to ${high} kJ/mol at the fast end ${span}.`,
        `ln of their ratio is ${interval} with every lag of ${names} left free, so no constant lag makes it.`,
        ...(beyond.length > 0 ? [`Beside the bend there is a lag beyond calibration: ${beyond.join('; ')}.`] : []),
        'One activation energy over the whole span would mislead any extrapolation.',
      ];
    case 'instrument':
      return [
        `What looks like a bend comes from the instrument: ${beyond.join('; ')}.`,
        `With that lag taken out one activation energy of ${low} kJ/mol describes all scans ${span}; any bend left is below ${part} of E: ${interval}.`,
      ];
    case 'straight':
      return [
        `One activation energy of ${low} kJ/mol describes all scans ${span} on ${names}; any bend is below ${part} of E: ${interval}.`,
      ];
    case 'undecided':
      return [
        undecided(decision, interval, part),
        ...(deciding.length > 0 ? [`What would settle it: ${scansInWords(deciding)}.`] : []),
      ];
  }
}

/** VFT and MYEGA beside the bent law; a change of the deviance below this tells nothing. */
const TELLS = 4;

export function compareLaws({ vft, myega }: RivalShapes): string {
  const say = (name: string, change: number) =>
    Math.abs(change) < TELLS
      ? `${name} fits as well (deviance ${change >= 0 ? '+' : '−'}${Math.abs(change).toFixed(1)})`
      : `${name} fits ${change > 0 ? 'worse' : 'better'} by ${Math.abs(change).toFixed(1)} in deviance`;
  return `With as many parameters as the bent law, to first order: ${say('VFT', vft)}, ${say('MYEGA', myega)}.`;
}

function undecided({ reason, missing }: Decision, interval: string, part: string): string {
  switch (reason) {
    case 'too-few-scans':
      return `Too few scans to tell a bend from a lag: ${missing} more are needed for ${LEAST_DEGREES} degrees of freedom, at rates that were not run yet.`;
    case 'peaks-only':
      return `The temperatures bend (${interval}), but only peaks are known and a lag is large against their width: a smearing sensor moves a peak by less than its lag, which looks like a bend. Bring the curves.`;
    case 'fit-failed':
      return 'No law with a bend could be fitted to these temperatures; look for a scan that belongs to another event.';
    default:
      return `It cannot be told yet: the bend is ${interval}, which holds both none and one above ${part} of E.`;
  }
}
