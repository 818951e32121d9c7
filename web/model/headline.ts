import type { ParameterRow } from '../../schema/wire/parameters.ts';
import { methodRank } from '../words.ts';

/** The numbers of one event of a sample that stand for it. */
export interface EventNumbers {
  event: number;
  energies: ParameterRow[];
  exponents: ParameterRow[];
  /** All of them, every quantity, methods in their order */
  rows: ParameterRow[];
}

/** Order in which a sample's one activation energy is looked for: the first that exists stands in the map's margin. */
const ENERGY_ORDER = ['vyazovkin', 'friedman', 'starink', 'kissinger_akahira_sunose', 'ozawa_flynn_wall', 'kissinger'];
const EXPONENT_ORDER = ['jmak', 'augis_bennett', 'ozawa', 'matusita_sakka'];

/**
 * Consolidated rows: one number for a quantity, method and variant, pooled over conversion, with the Monte Carlo interval
 * where there is one. Refits without outliers stay in the table only.
 */
export function consolidate(rows: readonly ParameterRow[]): ParameterRow[] {
  const kept = new Map<string, ParameterRow>();
  for (const row of rows) {
    if (row.conversion !== null || (row.variant !== '' && row.variant !== 'peak')) continue;
    const key = [row.sample, row.event, row.quantity, row.method, row.variant, row.temperature_K].join('\u0000');
    const standing = kept.get(key);
    if (!standing || (standing.interval !== 'monte_carlo' && row.interval === 'monte_carlo')) kept.set(key, row);
  }
  return [...kept.values()];
}

/** Numbers of each event of each sample, events in order. */
export function numbersBySample(rows: readonly ParameterRow[]): Map<string, EventNumbers[]> {
  const samples = new Map<string, EventNumbers[]>();
  const consolidated = consolidate(rows).sort(
    (a, b) => methodRank(a.method) - methodRank(b.method) || a.variant.length - b.variant.length,
  );
  for (const row of consolidated) {
    let events = samples.get(row.sample);
    if (!events) samples.set(row.sample, (events = []));
    let numbers = events.find((e) => e.event === row.event);
    if (!numbers) {
      numbers = { event: row.event, energies: [], exponents: [], rows: [] };
      events.push(numbers);
      events.sort((a, b) => a.event - b.event);
    }
    numbers.rows.push(row);
    if (row.quantity === 'activation_energy') numbers.energies.push(row);
    else if (row.quantity === 'avrami_exponent') numbers.exponents.push(row);
  }
  return samples;
}

/** E over conversion of one event by the first method of ENERGY_ORDER that follows conversion, in its Monte Carlo interval. */
export interface EventEnergies {
  event: number;
  method: string;
  conversion: number[];
  value: number[];
  lower: number[];
  upper: number[];
}

export function energiesBySample(rows: readonly ParameterRow[]): Map<string, EventEnergies[]> {
  const found = new Map<string, EventEnergies>();
  for (const row of rows) {
    if (row.quantity !== 'activation_energy' || row.conversion === null) continue;
    if (row.variant !== '' || row.interval !== 'monte_carlo') continue;
    const key = `${row.sample}\u0000${row.event}\u0000${row.method}`;
    let energies = found.get(key);
    if (!energies) {
      energies = { event: row.event, method: row.method, conversion: [], value: [], lower: [], upper: [] };
      found.set(key, energies);
    }
    energies.conversion.push(row.conversion);
    energies.value.push(row.value);
    energies.lower.push(row.lower95 ?? row.value);
    energies.upper.push(row.upper95 ?? row.value);
  }
  const samples = new Map<string, EventEnergies[]>();
  for (const [key, energies] of found) {
    const [sample] = key.split('\u0000');
    const own = samples.get(sample) ?? [];
    const standing = own.findIndex((e) => e.event === energies.event);
    const rank = ({ method }: EventEnergies): number => ENERGY_ORDER.indexOf(method) + 1 || Number.POSITIVE_INFINITY;
    if (standing < 0) own.push(energies);
    else if (rank(energies) < rank(own[standing])) own[standing] = energies;
    samples.set(sample, own);
  }
  return samples;
}

const pick = (rows: readonly ParameterRow[], order: readonly string[]): ParameterRow | undefined =>
  order.map((method) => rows.find((row) => row.method === method)).find(Boolean) ?? rows[0];

export const headlineEnergy = (numbers: EventNumbers): ParameterRow | undefined => pick(numbers.energies, ENERGY_ORDER);
export const headlineExponent = (numbers: EventNumbers): ParameterRow | undefined =>
  pick(numbers.exponents, EXPONENT_ORDER);
