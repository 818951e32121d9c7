import { describe, expect, it } from 'vitest';
import { type Quantity, toSi, unitOf } from '../../jobs/instrument/units.ts';

/** Value in SI of one and of 100 units, by NIST SP 811 (2008), appendix B.8 and table 5 (prefixes). */
const CASES: [Quantity, string, number, number, string][] = [
  ['time', 's', 1, 100, 's'],
  ['time', 'ms', 1e-3, 0.1, 's'],
  ['time', 'µs', 1e-6, 1e-4, 's'],
  ['time', 'min', 60, 6000, 's'],
  ['time', 'h', 3600, 360_000, 's'],
  ['temperature', 'K', 1, 100, 'K'],
  ['temperature', '°C', 274.15, 373.15, 'K'],
  ['temperature', '°F', 255.927_777_777_777_8, 310.927_777_777_777_8, 'K'],
  ['temperature difference', '°F', 5 / 9, 500 / 9, 'K'],
  ['heat flow', 'W', 1, 100, 'W'],
  ['heat flow', 'mW', 1e-3, 0.1, 'W'],
  ['heat flow', 'µW', 1e-6, 1e-4, 'W'],
  ['heat flow', 'nW', 1e-9, 1e-7, 'W'],
  ['heat flow', 'W/g', 1000, 1e5, 'W/kg'],
  ['heat flow', 'mW/mg', 1000, 1e5, 'W/kg'],
  ['heat flow', 'mW/g', 1, 100, 'W/kg'],
  ['heat flow', 'W/kg', 1, 100, 'W/kg'],
  ['heat flow', 'J/(s g)', 1000, 1e5, 'W/kg'],
  ['heat flow', 'µV', 1e-6, 1e-4, 'V'],
  ['rate', 'K/min', 1 / 60, 100 / 60, 'K/s'],
  ['rate', '°C/s', 1, 100, 'K/s'],
  ['mass', 'ng', 1e-12, 1e-10, 'kg'],
  ['mass', 'µg', 1e-9, 1e-7, 'kg'],
  ['enthalpy', 'J/g', 1000, 1e5, 'J/kg'],
  ['sensitivity', 'µV/mW', 1e-3, 0.1, 'V/W'],
  ['velocity', 'nm/s', 1e-9, 1e-7, 'm/s'],
  ['heat capacity', 'J/(g K)', 1000, 1e5, 'J/(kg K)'],
  ['molar mass', 'g/mol', 1e-3, 0.1, 'kg/mol'],
];

describe('units', () => {
  it.each(CASES)('%s in %s', (quantity, text, one, hundred, si) => {
    const unit = unitOf(quantity, text);
    if (unit === undefined) throw new Error('not known');
    expect(unit.si).toBe(si);
    for (const [value, expected] of [
      [1, one],
      [100, hundred],
    ])
      expect(Math.abs(toSi(value, unit) / expected - 1)).toBeLessThan(4e-16);
  });

  it.each([
    ['time', ['sec', 'Seconds', '[s]', '(s)', 's.', 'S'], 's'],
    ['time', ['us', 'μs', 'µs', 'microseconds'], 'µs'],
    ['temperature', ['C', 'c', 'degC', 'deg C', '° C', 'ºC', '˚C', '℃', 'Celsius', 'degrees Celsius'], '°C'],
    ['temperature', ['k', 'Kelvin', 'degK', '\u212a'], 'K'],
    ['temperature', ['F', 'degF', '℉', 'fahrenheit'], '°F'],
    ['heat flow', ['J/s/g', 'J g-1 s-1', 'J·g⁻¹·s⁻¹', 'J/(g·s)', '[J/(s g)]', 'J per s g'], 'J/g s'],
    ['heat flow', ['mW mg^-1', 'mW mg⁻¹', 'mW·mg-1', '(mW)/(mg)', 'mw/mg'], 'mW/mg'],
  ] as [Quantity, string[], string][])('%s: %j are one unit', (quantity, spellings, symbol) => {
    for (const text of spellings) expect([text, unitOf(quantity, text)?.symbol]).toEqual([text, symbol]);
  });

  it('does not guess', () => {
    const none: [Quantity, string][] = [
      ['heat flow', 'MW'],
      ['heat flow', 'µV/mg'],
      ['heat flow', 'cal/s'],
      ['heat flow', 'W/m²'],
      ['heat flow', 'g/W'],
      ['time', 'm'],
      ['time', 'MS'],
      ['temperature', '°R'],
      ['temperature', ''],
      ['temperature', 'constructor'],
      ['mass', '('],
      ['rate', 'K'],
    ];
    for (const [quantity, text] of none) expect([text, unitOf(quantity, text)]).toEqual([text, undefined]);
  });
});
