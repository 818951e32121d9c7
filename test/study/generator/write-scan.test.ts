import { expect, test } from 'vitest';
import { drawDialects, ENCODINGS, HEAT_FLOW_UNITS, PLAIN_DIALECT } from './dialects.ts';
import { seededRandom } from './random.ts';
import { writeScan } from './write-scan.ts';

const scan = {
  timeS: Float64Array.of(0, 60, 120),
  temperatureK: Float64Array.of(273.15, 373.15, 473.15),
  heatFlowW: Float64Array.of(1e-3, -2e-3, 0),
};
const settings = { exotherm: 'up', massKg: 2e-6 } as const;

// The platform's own decoders, which come from another hand than the encoder.
const LABELS = {
  'utf-8': 'utf-8',
  'utf-8-bom': 'utf-8',
  'utf-16le': 'utf-16le',
  'utf-16be': 'utf-16be',
  'latin-1': 'latin1',
};

test.each(ENCODINGS)('%s decodes to the same text', (encoding) => {
  const bytes = writeScan(scan, { ...settings, dialect: { ...PLAIN_DIALECT, encoding, heatFlowUnit: 'µW' } });
  expect(new TextDecoder(LABELS[encoding]).decode(bytes).split('\n').slice(0, 2)).toEqual([
    'Time [s],Temperature [°C],Heat flow [µW]',
    '0,0,1000.00000',
  ]);
});

test('units, sign, decimal comma, order and the unit row', () => {
  const text = new TextDecoder().decode(
    writeScan(scan, {
      ...settings,
      exotherm: 'down',
      headerWords: true,
      digits: 5,
      dialect: {
        ...PLAIN_DIALECT,
        delimiter: ';',
        decimal: ',',
        unitPlace: 'row',
        timeUnit: 'min',
        temperatureUnit: '°F',
        heatFlowUnit: 'W/g',
        order: [2, 0, 1],
        indexColumn: true,
        preambleLines: 1,
      },
    }),
  );
  // 0 °C = 32 °F, 100 °C = 212 °F; 1 mW on 2 mg = 0.5 W/g
  expect(text.split('\n')).toEqual([
    'SYNTHETIC DATA: made by a simulation, no measurement',
    'Index;Heat flow exo down;Time;Temperature',
    ';W/g;min;°F',
    '1;-0,50000;0;32,000',
    '2;1,0000;1,0000;212,00',
    '3;0;2,0000;392,00',
    '',
  ]);
});

test('any nine dialects in a row hold every unit of heat flow, encoding and delimiter', () => {
  const drawn = drawDialects(18, seededRandom('dialects')).slice(0, 8);
  expect(new Set(drawn.map((d) => d.heatFlowUnit)).size).toBe(HEAT_FLOW_UNITS.length - 1);
  expect(new Set(drawn.map((d) => d.encoding)).size).toBe(ENCODINGS.length);
});

test('flaws stand where they were asked for', () => {
  const text = new TextDecoder().decode(
    writeScan(scan, { ...settings, dialect: PLAIN_DIALECT, flaws: { repeatedTimes: 1, wordCells: 1 } }),
  );
  expect(text.match(/overrange/g)).toHaveLength(3);
  expect(text.trimEnd().split('\n')).toHaveLength(5);
});
