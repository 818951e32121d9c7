import { describe, expect, test } from 'vitest';
import {
  formatDuration,
  formatEstimate,
  formatFixed,
  formatPowerOfTen,
  formatRate,
  formatSignificant,
  formatTemperature,
} from '../../web/format.ts';

const CELSIUS = { temperature: '°C', rate: 'K/min' } as const;
const KELVIN = { temperature: 'K', rate: 'K/s' } as const;

test('temperatures: 273.15 K is 0 °C (SI brochure, 9th edition, 2.3.1)', () => {
  expect(formatTemperature(273.15, CELSIUS)).toBe('0.0\u00a0°C');
  expect(formatTemperature(263.15, CELSIUS)).toBe('−10.0\u00a0°C');
  expect(formatTemperature(673.16, KELVIN)).toBe('673.2\u00a0K');
});

test('rates: 1 K/s is 60 K/min', () => {
  expect(formatRate(1 / 6, CELSIUS)).toBe('10\u00a0K/min');
  expect(formatRate(1 / 6, KELVIN)).toBe('0.167\u00a0K/s');
  expect(formatRate(30_000, KELVIN)).toBe('30\u202f000\u00a0K/s');
});

test('a number rounded to zero has no sign', () => {
  expect(formatFixed(-0.04, 1)).toBe('0.0');
  expect(formatFixed(-12345.6, 0)).toBe('−12\u202f346');
});

test('significant digits keep zeros before the point and drop those after it', () => {
  expect(formatSignificant(1200)).toBe('1200');
  expect(formatSignificant(0.05)).toBe('0.05');
  expect(formatSignificant(9.999)).toBe('10');
  expect(formatSignificant(0)).toBe('0');
  expect(formatSignificant(1.4891e-17)).toBe('1.49\u00a0×\u00a010⁻¹⁷');
  expect(formatSignificant(-9.9999e-5)).toBe('\u2212' + '0.0001');
  expect(formatSignificant(-2e-300)).toBe('\u22122\u00a0×\u00a010⁻³⁰⁰');
});

describe('value and interval (digits by common practice, no source)', () => {
  test.each([
    [214.23, 211.1, 217.4, '214', '±\u00a03'],
    [214.23, 212.7, 215.8, '214.2', '±\u00a01.6'],
    [2.984, 2.922, 3.046, '2.98', '±\u00a00.06'],
    [48.2, 30, 66, '48', '±\u00a018'],
    [100, 97, 108, '100', '+8 −3'],
    // 0.0996 rounds to 0.10: two digits, as for every spread that starts with 1.
    [1, 0.9004, 1.0996, '1.00', '±\u00a00.10'],
  ])('%s in [%s, %s]', (value, lower, upper, shown, spread) => {
    expect(formatEstimate(value, lower, upper)).toEqual({ value: shown, spread });
  });

  test('without an interval there is no spread', () => {
    expect(formatEstimate(41.234, null, null)).toEqual({ value: '41.23', spread: '' });
    expect(formatEstimate(5, 5, 5)).toEqual({ value: '5', spread: '' });
  });
});

test('powers of ten', () => {
  expect([-4, -2, 0, 3, 4, 12].map(formatPowerOfTen)).toEqual(['10⁻⁴', '0.01', '1', '1000', '10⁴', '10¹²']);
});

test('durations', () => {
  expect([0.2, 40, 200, 7800].map(formatDuration)).toEqual(['1 s', '40 s', '3 min', '2 h 10 min']);
});

test('an interval decides the digits of large and small numbers too', () => {
  const shown = (value: number, half: number): string => {
    const { value: text, spread } = formatEstimate(value, value - half, value + half);
    return `${text} ${spread}`.replaceAll('\u00a0', ' ').replaceAll('\u202f', ' ');
  };
  expect(shown(4919, 439)).toBe('4900 ± 400');
  expect(shown(4919, 139)).toBe('4920 ± 140');
  expect(shown(30_822_886_236, 3_476_253_839)).toBe('(3.1 ± 0.3) × 10¹⁰');
  expect(shown(0.0001, 0.00002)).toBe('(1.00 ± 0.20) × 10⁻⁴');
});
