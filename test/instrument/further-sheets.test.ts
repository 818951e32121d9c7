import { expect, it } from 'vitest';
import { readGoalSheet, readPeaksSheet, readProgram, readViscositySheet } from '../../jobs/instrument/index.ts';
import { encode } from './scan-text.ts';

const bytesOf = (text: string): Uint8Array => encode(text, 'utf8');

it('peaks.csv in SI, half a kelvin where no error is stated', () => {
  const text =
    'sample;instrument;event;rate [K/min];peak [°C];onset [K];glass transition [°C];melting [°C];replicate;peak error [K]\n' +
    'S;F;1;30;226,85;490;;;a;0,2\nS;F;;60;230;;;;;\nS;F;;60;;;;;;\n';
  const { rows, flags } = readPeaksSheet(bytesOf(text), 'peaks.csv');
  expect(rows).toEqual([
    {
      sample: 'S',
      instrument: 'F',
      event: 1,
      rateKPerS: 0.5,
      peakK: expect.closeTo(500, 10),
      onsetK: 490,
      replicate: 'a',
      peakErrorK: 0.2,
      line: 2,
    },
    { sample: 'S', instrument: 'F', rateKPerS: 1, peakK: expect.closeTo(503.15, 10), peakErrorK: 0.5, line: 3 },
  ]);
  expect(flags.map((f) => [f.code, f.detail])).toEqual([
    ['sheet-damaged', 'line 4 has no temperature'],
    ['peak-error-assumed', '1 of 2 rows state no peak error; 0.5 K is taken for each.'],
  ]);
});

it('peaks.csv: melting temperatures are told to be used nowhere, and a row of nothing else is left out', () => {
  const text =
    'sample;instrument;rate [K/min];peak [K];melting [K];peak error [K]\nS;F;60;500;700;0.2\nS;F;30;;701;0.2\n';
  const { rows, flags } = readPeaksSheet(bytesOf(text), 'peaks.csv');
  expect(rows.map((r) => r.line)).toEqual([2]);
  expect(flags.map((f) => f.code)).toEqual(['sheet-damaged', 'sheet-column-unused']);
});

it.each([
  ['Pa s', 11.5],
  ['Pa·s', 11.5],
  ['dPa s', 10.5],
  ['P', 10.5],
])('viscosity.csv: the logarithm of a number of %s', (unit, log10PaS) => {
  const { rows, flags } = readViscositySheet(
    bytesOf(`sample,temperature [°C],log10 viscosity [${unit}]\nS,500,11.5\n`),
    'viscosity.csv',
  );
  expect(flags).toEqual([]);
  expect(rows).toEqual([
    { sample: 'S', temperatureK: expect.closeTo(773.15, 10), log10PaS: expect.closeTo(log10PaS, 12), line: 2 },
  ]);
});

it('goal.csv: what is left empty is asked for; a row that asks nothing is flagged', () => {
  const text = 'sample,conversion [%],temperature [°C],time [h]\nS,1,85,87660\nS,1,,\nS,,85,\nS,150,85,1\n';
  const { rows, flags } = readGoalSheet(bytesOf(text), 'goal.csv');
  expect(rows).toEqual([
    { sample: 'S', conversion: 0.01, temperatureK: 358.15, timeS: 87660 * 3600, line: 2 },
    { sample: 'S', conversion: 0.01, line: 3 },
  ]);
  expect(flags.map((f) => f.detail)).toEqual([
    expect.stringContaining('line 5 has «150»'),
    'line 4 asks nothing: of conversion, temperature and time it has 1',
  ]);
});

it('a programme in SI; times that do not rise are flagged, the rest is read', () => {
  const { programme, flags } = readProgram(
    bytesOf('time [min];temperature [°C]\n0;25\n1;100\n1;200\n2;260\n'),
    'programs/reflow.csv',
  );
  expect(programme?.name).toBe('programs/reflow.csv');
  expect(Array.from(programme!.timeS)).toEqual([0, 60, 120]);
  expect(Array.from(programme!.temperatureK)).toEqual([298.15, 373.15, 533.15]);
  expect(flags.map((f) => f.detail)).toEqual(['line 4: 60 s does not come after 60 s']);
});

it.each([
  ['time [s],temperature [°C]\n0,25\n', 'the programme has 1 rows'],
  ['time [s],temperature\n0,25\n1,30\n', 'states no unit'],
  ['', 'the sheet is empty'],
])('no programme: %j', (text, detail) => {
  const { programme, flags } = readProgram(bytesOf(text), 'programs/x.csv');
  expect(programme).toBeUndefined();
  expect(flags.map((f) => f.detail).join(' ')).toContain(detail);
  expect(flags.some((f) => f.severity === 'stop')).toBe(true);
});
