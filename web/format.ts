import { celsiusFromKelvin, kelvinPerMinute } from '../schema/wire/units.ts';

/** The only place where °C and K/min exist on the page; everything handed in is SI. */
export interface Units {
  temperature: '°C' | 'K';
  rate: 'K/min' | 'K/s';
}

const NARROW_SPACE = '\u202f';
const MINUS = '\u2212';
const SUPERSCRIPTS = '⁰¹²³⁴⁵⁶⁷⁸⁹';

/** A finite number with a fixed count of decimals, a true minus and groups of three from five digits on. */
export function formatFixed(value: number, decimals: number): string {
  const [whole, fraction] = Math.abs(value).toFixed(Math.max(0, decimals)).split('.');
  const grouped = whole.length > 4 ? whole.replace(/\B(?=(\d{3})+$)/g, NARROW_SPACE) : whole;
  const text = fraction ? `${grouped}.${fraction}` : grouped;
  return value < 0 && Number(text.replaceAll(NARROW_SPACE, '')) !== 0 ? MINUS + text : text;
}

/** Decimals that show `digits` significant digits of `value`; never negative. */
function decimalsFor(value: number, digits: number): number {
  if (value === 0) return 0;
  return Math.max(0, digits - 1 - Math.floor(Math.log10(Math.abs(value))));
}

/** Below this a number is written with a power of ten: zeros after the point cannot be counted by eye. */
const SMALLEST_PLAIN = 1e-4;

/**
 * Significant digits without trailing zeros after the point, e.g. 3 digits: 0.16667 → `0.167`, 20 → `20`, 1.49e-17 → `1.49 × 10⁻¹⁷`.
 */
export function formatSignificant(value: number, digits = 3): string {
  const rounded = Number(value.toPrecision(digits));
  if (rounded !== 0 && Math.abs(rounded) < SMALLEST_PLAIN) {
    const exponent = Math.floor(Math.log10(Math.abs(rounded)));
    const mantissa = Number((rounded / 10 ** exponent).toPrecision(digits));
    return `${formatSignificant(mantissa, digits)}\u00a0×\u00a0${formatExponent(exponent)}`;
  }
  const decimals = decimalsFor(rounded, digits);
  const text = formatFixed(rounded, decimals);
  return decimals > 0 ? text.replace(/\.?0+$/, '') : text;
}

/** Temperature in the chosen unit, to 0.1. */
export function formatTemperature(temperatureK: number, units: Units): string {
  const value = units.temperature === 'K' ? temperatureK : celsiusFromKelvin(temperatureK);
  return `${formatFixed(value, 1)}\u00a0${units.temperature}`;
}

/** A heating rate as a plain number in the chosen unit. */
export function rateInUnit(rateKPerS: number, units: Units): number {
  return units.rate === 'K/s' ? rateKPerS : kelvinPerMinute(rateKPerS);
}

export function formatRate(rateKPerS: number, units: Units): string {
  return `${formatSignificant(rateInUnit(rateKPerS, units))}\u00a0${units.rate}`;
}

/** A whole power of ten for an axis: plain from 0.001 to 1000, else as 10 with an exponent. */
export function formatPowerOfTen(exponent: number): string {
  return exponent >= -3 && exponent <= 3 ? formatSignificant(10 ** exponent, 1) : formatExponent(exponent);
}

/** 10 with an exponent. */
export function formatExponent(exponent: number): string {
  const digits = [...String(Math.abs(exponent))].map((d) => SUPERSCRIPTS[Number(d)]).join('');
  return `10${exponent < 0 ? '⁻' : ''}${digits}`;
}

/**
 * Decimals of an uncertainty worth showing, negative for tens and hundreds: two digits when it starts with 1 or 2, else one (common
 * practice, no source).
 */
function spreadDecimals(spread: number): number {
  const exponent = Math.floor(Math.log10(spread));
  const leading = Number((spread / 10 ** exponent).toPrecision(2));
  return -exponent + (leading < 3 ? 1 : 0);
}

export interface Estimate {
  value: string;
  /** `± 3.1`, `+4.0 −2.2` for a lopsided interval, empty where there is none. */
  spread: string;
}

/** Value and 95 % interval with as many digits as the interval supports. */
export function formatEstimate(value: number, lower: number | null, upper: number | null): Estimate {
  if (lower === null || upper === null) return { value: formatSignificant(value, 4), spread: '' };
  const below = value - lower;
  const above = upper - value;
  const larger = Math.max(below, above);
  if (!(larger > 0)) return { value: formatSignificant(value, 4), spread: '' };
  const exponent = value === 0 ? 0 : Math.floor(Math.log10(Math.abs(value)));
  if (exponent >= 5 || exponent < -3) {
    const factor = 10 ** -exponent;
    const scaled = formatEstimate(value * factor, lower * factor, upper * factor);
    return { value: `(${scaled.value}`, spread: `${scaled.spread})\u00a0×\u00a0${formatExponent(exponent)}` };
  }
  const places = spreadDecimals(larger);
  const decimals = Math.max(0, places);
  const round = (number: number): number => (places < 0 ? Math.round(number * 10 ** places) / 10 ** places : number);
  const lopsided = Math.min(below, above) < larger / 1.5;
  const spread = lopsided
    ? `+${formatFixed(round(above), decimals)} ${MINUS}${formatFixed(round(below), decimals)}`
    : `±\u00a0${formatFixed(round((above + below) / 2), decimals)}`;
  return { value: formatFixed(round(value), decimals), spread };
}

/** A duration in words, for the time left: `40 s`, `3 min`, `2 h 10 min`. */
export function formatDuration(seconds: number): string {
  if (seconds < 90) return `${Math.max(1, Math.round(seconds))} s`;
  const minutes = Math.round(seconds / 60);
  if (minutes < 90) return `${minutes} min`;
  return `${Math.floor(minutes / 60)} h ${minutes % 60} min`;
}

export function formatBytes(bytes: number): string {
  if (bytes < 1000) return `${bytes} B`;
  if (bytes < 1e6) return `${formatSignificant(bytes / 1e3)} kB`;
  return `${formatSignificant(bytes / 1e6)} MB`;
}

/** `1 scan`, `3 scans`. */
export function formatCount(count: number, one: string, many = `${one}s`): string {
  return `${formatFixed(count, 0)} ${count === 1 ? one : many}`;
}
