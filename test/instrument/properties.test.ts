import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { readScan } from '../../jobs/instrument/index.ts';
import { type Dialect, encode, plainScan, tableText } from './scan-text.ts';

/** Decimal texts of every shape: long and short, with and without exponent, near the limits of exactness. */
const decimalText = fc
  .record({
    sign: fc.constantFrom('', '-', '+'),
    whole: fc.stringMatching(/^\d{0,20}$/),
    fraction: fc.option(fc.stringMatching(/^\d{0,20}$/)),
    exponent: fc.option(
      fc.record({
        letter: fc.constantFrom('e', 'E'),
        sign: fc.constantFrom('', '-', '+'),
        value: fc.integer({ min: 0, max: 330 }),
      }),
    ),
  })
  .map(({ sign, whole, fraction, exponent }) => {
    const digits = whole === '' && (fraction === null || fraction === '') ? '0' : whole;
    return `${sign}${digits}${fraction === null ? '' : `.${fraction}`}${exponent === null ? '' : `${exponent.letter}${exponent.sign}${exponent.value}`}`;
  })
  .filter((text) => Number.isFinite(Number(text)));

it('a number in a file is what Number makes of its text, to the last bit', () => {
  fc.assert(
    fc.property(
      fc.array(fc.oneof(decimalText, fc.double({ noNaN: true, noDefaultInfinity: true }).map(String)), {
        minLength: 20,
        maxLength: 60,
      }),
      fc.constantFrom('.', ','),
      (texts, decimal) => {
        const rows = texts.map((text, i) => [String(i), '300', text]);
        const text = tableText(
          { delimiter: ';', decimal: decimal as '.', lineEnd: '\n' },
          [],
          ['time [s]', 'temperature [K]', 'heat flow [W]'],
          rows,
        );
        const outcome = readScan(encode(text, 'utf8'), 'a.txt');
        if (!outcome.ok) throw new Error(outcome.refusal.reason);
        texts.forEach((t, i) => {
          if (!Object.is(outcome.scan.heatFlow[i], Number(t)))
            throw new Error(`${t} was read as ${outcome.scan.heatFlow[i]}`);
        });
      },
    ),
    { numRuns: 300 },
  );
});

/** SI value of `one unit · x` by hand; factors from NIST SP 811 (2008), B.8. */
const TIME_UNITS: [string, number][] = [
  ['s', 1],
  ['ms', 1e-3],
  ['µs', 1e-6],
  ['min', 60],
  ['h', 3600],
];
const TEMPERATURE_UNITS: [string, (k: number) => number][] = [
  ['K', (k) => k],
  ['°C', (k) => k - 273.15],
  ['°F', (k) => (k * 9) / 5 - 459.67],
];
const HEAT_FLOW_UNITS: [string, number, string][] = [
  ['W', 1, 'W'],
  ['mW', 1e-3, 'W'],
  ['µW', 1e-6, 'W'],
  ['nW', 1e-9, 'W'],
  ['W/g', 1e3, 'W/kg'],
  ['mW/mg', 1e3, 'W/kg'],
  ['mW/g', 1, 'W/kg'],
  ['W/kg', 1, 'W/kg'],
  ['J/(s g)', 1e3, 'W/kg'],
  ['µV', 1e-6, 'V'],
];
const dialectOf = fc
  .record({
    delimiter: fc.constantFrom<Dialect['delimiter']>('\t', ';', ',', '|', ' ', '   '),
    decimal: fc.constantFrom<Dialect['decimal']>('.', ','),
    lineEnd: fc.constantFrom<Dialect['lineEnd']>('\n', '\r', '\r\n'),
    encoding: fc.constantFrom<Dialect['encoding']>(
      'utf8',
      'utf8-mark',
      'utf16le',
      'utf16le-mark',
      'utf16be',
      'utf16be-mark',
      'latin1',
    ),
  })
  .filter((d) => !(d.delimiter === ',' && d.decimal === ','));

it('a table in any dialect, encoding and units reads back to the same SI numbers within 1e-12', () => {
  const property = fc.property(
    dialectOf,
    fc.constantFrom(...TIME_UNITS),
    fc.constantFrom(...TEMPERATURE_UNITS),
    fc.constantFrom(...HEAT_FLOW_UNITS),
    fc.constantFrom('brackets', 'parentheses', 'slash', 'below'),
    fc.array(fc.constantFrom('Laboratory 3', 'Mass: 3.21 mg', '', 'exo up', '20 °C'), { maxLength: 6 }),
    fc.array(
      fc.tuple(
        fc.double({ min: 1e-3, max: 10, noNaN: true }),
        fc.double({ min: 150, max: 1900, noNaN: true }),
        fc.integer({ min: -1_000_000, max: 1_000_000 }).map((n) => n / 999_983),
      ),
      { minLength: 20, maxLength: 40 },
    ),
    (dialect, [timeUnit, seconds], [temperatureUnit, fromK], [heatFlowUnit, perUnit, si], style, head, steps) => {
      let t = 0;
      const rows = steps.map(([step, k, q]) => [(t += step), k, q]);
      const named = (name: string, unit: string) =>
        ({ brackets: `${name} [${unit}]`, parentheses: `${name} (${unit})`, slash: `${name}/${unit}`, below: name })[
          style
        ] as string;
      const units = [timeUnit, temperatureUnit, heatFlowUnit];
      // One blank as delimiter leaves no blank for a name without a bracket behind it.
      const names =
        dialect.delimiter === ' ' && (style === 'slash' || style === 'below')
          ? ['time', 'temperature', 'heat-flow']
          : ['Time', 'Sample temperature', 'Heat flow'];
      const cells = rows.map(([s, k, q]) => [String(s / seconds), String(fromK(k)), String(q / perUnit)]);
      const body = style === 'below' ? [units.map((u) => `[${u}]`), ...cells] : cells;
      if (dialect.delimiter === ' ' && style === 'slash' && heatFlowUnit === 'J/(s g)') return;
      const bytes = encode(
        tableText(
          dialect,
          head,
          names.map((n, i) => named(n, units[i])),
          body,
        ),
        dialect.encoding,
      );
      const outcome = readScan(bytes, 'a.txt');
      if (!outcome.ok) throw new Error(outcome.refusal.reason);
      const { scan } = outcome;
      expect(scan.heatFlowUnit).toBe(si);
      expect(scan.exotherm).toBe(head.includes('exo up') ? 'up' : undefined);
      expect(scan.timeS.length).toBe(rows.length);
      rows.forEach(([s, k, q], i) => {
        const far = (got: number, meant: number, size: number) => Math.abs(got - meant) > 1e-12 * size;
        if (far(scan.timeS[i], s, s) || far(scan.temperatureK[i], k, k) || far(scan.heatFlow[i], q, Math.abs(q)))
          throw new Error(
            `row ${i}: ${s} s, ${k} K, ${q} ${si} came back as ${scan.timeS[i]}, ${scan.temperatureK[i]}, ${scan.heatFlow[i]}`,
          );
      });
    },
  );
  fc.assert(property, { numRuns: 300 });
});

describe('changed files', () => {
  const sound = encode(`note\nexo up\n${plainScan(60)}`, 'utf8');
  const wide = encode(`note\nexo up\n${plainScan(60)}`, 'utf16le-mark');
  const edit = fc.record({
    at: fc.nat(1_000_000),
    cut: fc.nat(40),
    put: fc.oneof(
      fc.uint8Array({ maxLength: 12 }),
      fc
        .constantFrom('\n', ',', ';', '"', 'e', '-', ',,,', '\r', '1e999', '\0', 'nan')
        .map((s) => new TextEncoder().encode(s)),
    ),
  });

  it('are read as a sound scan or refused with a reason and an action; nothing throws or hangs', () => {
    fc.assert(
      fc.property(fc.constantFrom(sound, wide), fc.array(edit, { minLength: 1, maxLength: 6 }), (original, edits) => {
        let bytes = original;
        for (const { at, cut, put } of edits) {
          const from = at % (bytes.length + 1);
          bytes = Uint8Array.from([...bytes.subarray(0, from), ...put, ...bytes.subarray(from + cut)]);
        }
        const outcome = readScan(bytes, 'a.txt');
        if (!outcome.ok) {
          expect(outcome.refusal.reason.length).toBeGreaterThan(10);
          expect(outcome.refusal.action.length).toBeGreaterThan(10);
          return;
        }
        const { timeS, temperatureK, heatFlow } = outcome.scan;
        expect(timeS.length).toBeGreaterThanOrEqual(20);
        expect([temperatureK.length, heatFlow.length]).toEqual([timeS.length, timeS.length]);
        for (let i = 0; i < timeS.length; i++)
          if (
            !(
              Number.isFinite(timeS[i]) &&
              temperatureK[i] > 0 &&
              Number.isFinite(heatFlow[i]) &&
              (i === 0 || timeS[i] > timeS[i - 1])
            )
          )
            throw new Error(`row ${i} is not sound`);
      }),
      { numRuns: 400 },
    );
  });
});
