import { FLAG_CODES, type FlagCode } from '../schema/wire/flags.ts';
import type { SampleState, ScanState } from '../schema/wire/states.ts';

/** Names of methods, in the order in which they are listed. A code without a name is shown as it is, last. */
const METHOD_NAMES: Record<string, string> = {
  kissinger: 'Kissinger',
  augis_bennett: 'Augis–Bennett',
  boswell: 'Boswell',
  ozawa: 'Ozawa',
  ozawa_flynn_wall: 'Ozawa–Flynn–Wall',
  kissinger_akahira_sunose: 'Kissinger–Akahira–Sunose',
  starink: 'Starink',
  friedman: 'Friedman',
  vyazovkin: 'Vyazovkin',
  vyazovkin_linear: 'Vyazovkin, linear programme',
  jmak: 'JMAK',
  jmak_isothermal: 'JMAK, holds',
  matusita_sakka: 'Matusita–Sakka',
  sestak_berggren: 'Šesták–Berggren',
  area: 'area under the event',
  shared_law: 'one law for all instruments',
  moynihan: 'Moynihan',
  viscosity: 'viscosity table',
  stability: 'characteristic temperatures',
};

export const methodName = (method: string, variant = ''): string =>
  `${METHOD_NAMES[method] ?? method.replaceAll('_', ' ')}${variant === 'peak' ? ', peaks' : ''}`;

/** Quantities of the parameters table in the order in which they are shown, with the unit as it stands there. */
export const QUANTITIES: readonly { quantity: string; title: string; unit: string }[] = [
  { quantity: 'activation_energy', title: 'Activation energy E', unit: 'kJ/mol' },
  { quantity: 'local_activation_energy', title: 'Local activation energy', unit: 'kJ/mol' },
  { quantity: 'avrami_exponent', title: 'Avrami exponent n', unit: '' },
  { quantity: 'model_exponent_m', title: 'Exponent M', unit: '' },
  { quantity: 'model_exponent_n', title: 'Exponent N', unit: '' },
  { quantity: 'ln_prefactor', title: 'Prefactor ln A', unit: 'A in 1/s' },
  { quantity: 'enthalpy', title: 'Enthalpy', unit: 'J/g' },
  { quantity: 'glass_transition_energy', title: 'Energy of the glass transition', unit: 'kJ/mol' },
  { quantity: 'fragility', title: 'Fragility m', unit: '' },
  { quantity: 'decoupling_exponent', title: 'Decoupling exponent ξ', unit: '' },
  { quantity: 'reduced_glass_transition', title: 'Glass transition over melting, Tg/Tm', unit: '' },
  { quantity: 'hruby', title: 'Hrubý number', unit: '' },
  { quantity: 'supercooled_range', title: 'Supercooled range', unit: 'K' },
  { quantity: 'critical_heating_rate', title: 'Critical heating rate', unit: 'K/s' },
  { quantity: 'critical_cooling_rate', title: 'Critical cooling rate', unit: 'K/s' },
];

const METHOD_ORDER = Object.keys(METHOD_NAMES);

/** Place of a method in a list. */
export const methodRank = (method: string): number =>
  METHOD_ORDER.includes(method) ? METHOD_ORDER.indexOf(method) : METHOD_ORDER.length;

export const SAMPLE_STATE_NAMES: Record<SampleState, string> = {
  waiting: 'waiting for scans',
  queued: 'fit queued',
  fitting: 'fitting now',
  fitted: 'fitted',
  insufficient: 'not enough to fit',
  failed: 'fit failed',
  stale: 'new scans to fit',
};

export const SCAN_STATE_NAMES: Record<ScanState, string> = {
  received: 'waiting to be read',
  read: 'read, waiting to be reduced',
  reduced: 'reduced',
  set_aside: 'set aside',
  failed: 'failed',
  unassigned: 'without a sample',
  excluded: 'excluded by hand',
  superseded: 'replaced by newer bytes',
};

/** What the verdict on the bend of the Kissinger plot says, short. */
const VERDICT_NAMES: Record<string, string> = {
  straight: 'one straight law',
  instrument: 'bend made by an instrument',
  material: 'the material bends',
  undecided: 'bend not decided',
};

export const verdictName = (verdict: string): string => VERDICT_NAMES[verdict] ?? verdict;

const STEP_NAMES: Record<string, string> = {
  'unpack-archive': 'unpack an archive',
  'read-sheet': 'read a sheet',
  'read-scan': 'read a scan',
  'assign-scans': 'match files with sheets',
  'reduce-scan': 'reduce a scan',
  'calibrate-instrument': 'calibrate an instrument',
  'fit-sample': 'fit a sample',
  'judge-curvature': 'judge the bend',
  'forecast-sample': 'forecast a sample',
  'plan-campaign': 'plan the campaign',
};

export const stepName = (step: string): string => STEP_NAMES[step] ?? step.replaceAll('-', ' ');

/** Short names of gaps, for the margin of the map. */
const GAP_NAMES: Record<string, string> = {
  'few-rates': 'too few rates',
  'narrow-span': 'narrow span of rates',
  'decade-gap': 'empty decade',
  'no-replicate': 'nothing repeated',
  'instruments-not-bridged': 'instruments share no rate',
  'no-standard': 'no standard',
};

export const gapName = (code: string): string => GAP_NAMES[code] ?? code.replaceAll('-', ' ');

/** What a flag says, in words; a code of a newer server is shown as it is. */
export const flagMeaning = (code: FlagCode): string => FLAG_CODES[code]?.[1] ?? code;

/** First letter as a capital and no line break before a unit, for sentences made of table texts. */
export const sentence = (text: string): string =>
  (text.charAt(0).toUpperCase() + text.slice(1)).replace(
    /(\d) (?=%|°C|(?:K|s|min|h|d|days|years|kJ|decades)\b)/g,
    '$1\u00a0',
  );
