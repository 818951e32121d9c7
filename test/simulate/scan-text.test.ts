import { describe, expect, test } from 'vitest';
import { type TextDialect, writeScanText } from '../../jobs/simulate/index.ts';

const columns = {
  timeS: Float64Array.of(0, 30, 60.5),
  temperatureK: Float64Array.of(300, 310.25, 320.123456),
  heatFlowW: Float64Array.of(1e-3, -2.5e-3, 1.25e-7),
  massKg: 5e-6,
};
const plain: TextDialect = {
  encoding: 'utf-8',
  lineEnd: '\n',
  delimiter: ',',
  decimal: '.',
  timeUnit: 's',
  temperatureUnit: 'K',
  heatFlowUnit: 'W',
  unitPlace: 'brackets',
  headers: { time: 'Time', temperature: 'Temperature', heatFlow: 'Heat flow' },
  preamble: [],
};
// Decoded by the platform, not by the project.
const decode = (bytes: Uint8Array, label = 'utf-8') => new TextDecoder(label, { ignoreBOM: true }).decode(bytes);

describe('scan text', () => {
  test('SI, comma, point', () => {
    expect(decode(writeScanText(columns, plain))).toBe(
      'Time [s],Temperature [K],Heat flow [W]\n0,300,0.001\n30,310.25,-0.0025\n60.5,320.1235,1.25e-7\n',
    );
  });

  test('units are converted (min, °C, W/g by the mass), unit row, semicolon, decimal comma, CRLF, preamble, Latin-1', () => {
    const bytes = writeScanText(columns, {
      ...plain,
      encoding: 'latin-1',
      lineEnd: '\r\n',
      delimiter: ';',
      decimal: ',',
      timeUnit: 'min',
      temperatureUnit: '°C',
      heatFlowUnit: 'W/g',
      unitPlace: 'row',
      preamble: ['Prüfling: synthetic'],
    });
    expect(decode(bytes, 'windows-1252')).toBe(
      [
        'Prüfling: synthetic',
        'Time;Temperature;Heat flow',
        'min;°C;W/g',
        '0;26,85;0,2',
        '0,5;37,1;-0,5',
        '1,008333;46,97346;0,000025',
        '',
      ].join('\r\n'),
    );
  });

  test('ms and µW, tab, UTF-16 of either order, with a byte order mark', () => {
    const dialect = {
      ...plain,
      delimiter: '\t',
      timeUnit: 'ms',
      heatFlowUnit: 'µW',
      unitPlace: 'parentheses',
    } as const;
    const little = writeScanText(columns, { ...dialect, encoding: 'utf-16le' });
    const big = writeScanText(columns, { ...dialect, encoding: 'utf-16be' });
    const expected =
      '\uFEFFTime (ms)\tTemperature (K)\tHeat flow (µW)\n0\t300\t1000\n30000\t310.25\t-2500\n60500\t320.1235\t0.125\n';
    expect(decode(little, 'utf-16le')).toBe(expected);
    expect(decode(big, 'utf-16be')).toBe(expected);
  });

  test('runs of spaces: header words are joined, so that the rows split at the spaces', () => {
    const text = decode(
      writeScanText(columns, { ...plain, delimiter: 'spaces', unitPlace: 'slash', heatFlowUnit: 'mW/mg' }),
    );
    const rows = text
      .trimEnd()
      .split('\n')
      .map((line) => line.trim().split(/ +/));
    expect(rows[0]).toEqual(['Time/s', 'Temperature/K', 'Heatflow/(mW/mg)']);
    expect(rows.map((r) => r.length)).toEqual([3, 3, 3, 3]);
  });

  test('refuses what cannot be written', () => {
    expect(() => writeScanText(columns, { ...plain, decimal: ',' })).toThrow('delimiter and decimal mark');
    expect(() => writeScanText({ ...columns, massKg: undefined }, { ...plain, heatFlowUnit: 'W/g' })).toThrow('mass');
    expect(() => writeScanText(columns, { ...plain, encoding: 'latin-1', preamble: ['π'] })).toThrow('π');
  });
});
