/** What one cell of a header row names: a quantity, its unit, the direction of an exotherm. */
import type { ExothermDirection } from '../../schema/wire/states.ts';
import { directionOf, withoutDirection } from './direction.ts';
import { type Unit, unitOf } from './units.ts';

export type ScanQuantity = 'time' | 'temperature' | 'heat flow';
export const SCAN_QUANTITIES: readonly ScanQuantity[] = ['time', 'temperature', 'heat flow'];

export interface HeaderCell {
  /** The cell as it stands in the file. */
  text: string;
  quantity: ScanQuantity;
  unit?: Unit;
  /** A unit text that is not known. */
  unknownUnit?: string;
  exotherm?: ExothermDirection;
  /** Lower is the better choice where several columns name one quantity. */
  rank: number;
}

const words = (alternatives: string): RegExp => new RegExp(`(?:^| )(?:${alternatives})(?= |$)`, 'u');

/** Names of the quantities in the trade's words, English, German and French. */
const NAMES: Record<ScanQuantity, RegExp> = {
  time: words('time|elapsed|zeit|temps'),
  temperature: words('temperature|temperatures|temp|temperatur|température'),
  'heat flow': words(
    'heat ?flow|heat ?flux|heat ?power|calorimetric signal|dsc|hf|dq dt|dh dt|wärmestrom|waermestrom|flux de chaleur|flux thermique',
  ),
};
/** Names of the heat-flow signal that count only where no better word stands in the cell. */
const BARE_SIGNAL = words('signal|voltage|thermovoltage');
const NEVER: Record<ScanQuantity, RegExp> = {
  time: words('constant|date|response|delay|rate|derivative'),
  temperature: words('rate|difference|diff|delta|Δ|derivative|gradient|error|deviation'),
  'heat flow': words('derivative|deriv|ddsc|integral|error|deviation|calibration|sensitivity'),
};
const SECOND_CHOICE: Record<ScanQuantity, RegExp> = {
  time: words('segment|cycle|step|remaining'),
  temperature: words(
    'program|programme|programmed|furnace|oven|block|reference|ref|set|setpoint|ambient|room|cold|sink|nominal',
  ),
  'heat flow': words(
    'reversing|nonreversing|non|baseline|blank|reference|ref|raw|signal|voltage|thermovoltage|reversible',
  ),
};

/** A cell longer than this is prose. */
const LONGEST_NAME = 80;

/** Understands a header cell, or returns undefined when it names none of the three quantities. */
export function readHeaderCell(text: string): HeaderCell | undefined {
  if (text === '' || text.length > LONGEST_NAME) return undefined;
  const exotherm = directionOf(text);
  let best: HeaderCell | undefined;
  for (const { name, unit: unitText } of nameAndUnit(withoutDirection(text))) {
    const quantity = quantityOf(name, unitText);
    if (quantity === undefined) continue;
    const unit = unitText === undefined ? undefined : unitOf(quantity, unitText);
    const cell: HeaderCell = { text, quantity, exotherm, rank: rankOf(quantity, name), unit };
    if (unit !== undefined) return cell;
    if (unitText !== undefined) cell.unknownUnit ??= unitText;
    best ??= cell;
  }
  return best;
}

/** The readings of a cell as a name with a unit, likeliest first: a bracket, what follows a slash, no unit. */
export function nameAndUnit(text: string): { name: string; unit?: string }[] {
  const groups: string[] = [];
  let outside = '';
  let depth = 0;
  let group = '';
  for (const character of text) {
    if ((character === '[' || character === '(') && depth++ === 0) group = '';
    else if ((character === ']' || character === ')') && depth > 0 && --depth === 0) groups.unshift(group);
    else if (depth > 0) group += character;
    else outside += character;
  }
  const readings: { name: string; unit?: string }[] = groups.map((unit) => ({
    name: outside.replace(/\/\s*$/, ''),
    unit: unit.trim(),
  }));
  for (let at = text.indexOf('/'); at !== -1; at = text.indexOf('/', at + 1)) {
    const unit = text.slice(at + 1).trim();
    if (unit !== '') readings.push({ name: text.slice(0, at), unit });
  }
  readings.push({ name: outside });
  return readings;
}

/** Names in one form: lower case, single spaces, no marks; `HeatFlow` is two words. */
export function plainName(name: string): string {
  return name
    .normalize('NFKC')
    .replace(/(\p{Ll}{2})(?=\p{Lu})/gu, '$1 ')
    .toLowerCase()
    .replace(/[_\-.:#"'*%/!,;]+/g, ' ')
    .replace(/\s+/g, ' ')
    .trim();
}

function quantityOf(name: string, unitText: string | undefined): ScanQuantity | undefined {
  const symbol = name.replace(/[#*"'!.:%\s]/g, '');
  const plain = plainName(name);
  if (/^[tT]$/.test(symbol)) {
    // One letter serves both; its unit decides, and without a unit the case (ISO 80000: t time, T temperature).
    if (unitText !== undefined && unitOf('time', unitText) !== undefined) return 'time';
    if (unitText !== undefined && unitOf('temperature', unitText) !== undefined) return 'temperature';
    return symbol === 't' ? 'time' : 'temperature';
  }
  if (/^T_?(s|sample|m|meas)$/.test(symbol)) return 'temperature';
  if (/^[φϕΦ]$/.test(symbol.normalize('NFC')) || /^(phi|P|Q̇)$/.test(symbol)) return 'heat flow';
  const named = SCAN_QUANTITIES.filter((q) => NAMES[q].test(plain) && !NEVER[q].test(plain));
  if (named.length === 0 && BARE_SIGNAL.test(plain) && !NEVER['heat flow'].test(plain)) return 'heat flow';
  return named.length === 1 ? named[0] : undefined;
}

function rankOf(quantity: ScanQuantity, name: string): number {
  const plain = plainName(name);
  if (SECOND_CHOICE[quantity].test(plain)) return 2;
  return quantity === 'temperature' && words('sample').test(plain) ? 0 : 1;
}
