import { describe, expect, it } from 'vitest';
import { readInstrumentsSheet, readSamplesSheet, readScansSheet } from '../../jobs/instrument/index.ts';
import { type Dialect, encode } from './scan-text.ts';

const bytesOf = (text: string, encoding: Dialect['encoding'] = 'utf8'): Uint8Array => encode(text, encoding);
const scans = (text: string) => readScansSheet(bytesOf(text), 'scans.csv');

describe('scans.csv', () => {
  it('gives every column in SI with its line', () => {
    const { rows, flags } = scans(
      'file,sample,instrument,role,rate [K/min],mass [mg],exotherm,replicate,segment,reference,note\n' +
        'a/b.txt,S,F,standard,30,1.25,down,2,3,c.txt,"two, of ""three"""\n\n' +
        'd.txt.gz,S,F,,,,,,,,\n',
    );
    expect(flags).toEqual([]);
    expect(rows).toEqual([
      {
        file: 'a/b.txt',
        sample: 'S',
        instrument: 'F',
        role: 'standard',
        rateKPerS: 0.5,
        massKg: 1.25e-6,
        exotherm: 'down',
        replicate: '2',
        segment: 3,
        reference: 'c.txt',
        note: 'two, of "three"',
        line: 2,
      },
      { file: 'd.txt', sample: 'S', instrument: 'F', role: 'sample', line: 4 },
    ]);
  });

  it.each(['\t', ';', '|', '   '])('delimiter %j, any case, any order, a title above, decimal comma', (d) => {
    for (const encoding of ['utf8-mark', 'utf16le-mark', 'utf16be', 'latin1'] as const) {
      const text = [
        ['Campaign', 'of', 'spring'],
        ['Instrument', 'FILE', 'Mass (µg)', 'Rate / K/s', 'sample'],
        ['F', 'a.txt', '0,5', '1000,5', 'S'],
      ]
        .map((r) => r.join(d))
        .join('\r\n');
      const { rows, flags } = readScansSheet(bytesOf(text, encoding), 'scans.csv');
      expect(flags).toEqual([]);
      expect(rows).toEqual([
        { file: 'a.txt', sample: 'S', instrument: 'F', role: 'sample', massKg: 0.5e-9, rateKPerS: 1000.5, line: 3 },
      ]);
    }
  });

  it('two rate columns stand side by side; a row that fills both differently is damaged', () => {
    const { rows, flags } = scans(
      'file,sample,instrument,rate [K/min],rate [K/s]\na,S,F,30,\nb,S,F,,100\nc,S,F,60,1\nd,S,F,60,2\n',
    );
    expect(rows.map((r) => r.rateKPerS)).toEqual([0.5, 100, 1]);
    expect(flags.map((f) => f.detail)).toEqual([
      'line 5 gives rate twice: «2» under «rate [K/s]» is not what another column says.',
    ]);
  });

  it.each([
    ['a,S,,,', 'line 2 «a, S, , , » has no instrument'],
    ['a,S,F,fast,', 'line 2 has «fast» under «rate [K/min]»: not a number'],
    ['a,S,F,0,', 'a heating rate is not 0'],
    ['a,S,F,10,sideways', 'line 2 has «sideways» under «exotherm»: not one of up, down'],
    ['a,S,F,"10,000",', 'the comma can mark decimals or thousands'],
    ['a,=S,F,10,', 'starts with =, like a formula'],
    ['../a,S,F,10,', 'has a part «..»'],
    ['a,S,F,10,up,6', 'line 2 has 6 cells under a header of 5'],
  ])('flags the row %j and reads the others', (row, detail) => {
    const { rows, flags } = scans(`file,sample,instrument,rate [K/min],exotherm\n${row}\ngood.txt,S,F,20,up\n`);
    expect(rows.map((r) => r.file)).toEqual(['good.txt']);
    expect(flags).toHaveLength(1);
    expect(flags[0]).toMatchObject({ code: 'sheet-damaged', severity: 'stop', file: 'scans.csv' });
    expect(flags[0].detail).toContain(detail);
    expect(flags[0].action).toContain('The other rows were read.');
  });

  it('a unit that is missing or not known takes the column away, not the rows', () => {
    const { rows, flags } = scans('file,sample,instrument,rate,mass [grain]\na,S,F,10,3\n');
    expect(rows).toEqual([{ file: 'a', sample: 'S', instrument: 'F', role: 'sample', line: 2 }]);
    expect(flags.map((f) => f.detail)).toEqual([
      'the column «rate» (line 1) states no unit; its values were not used',
      'the column «mass [grain]» (line 1) has the unit «grain», which is not known; its values were not used',
    ]);
    expect(flags[0].action).toBe('Write the header as rate [unit] with one of K/min, K/s.');
  });

  it('notes columns of its own and flags a file named twice', () => {
    const { rows, flags } = scans('file,sample,instrument,segment,colour\na,S,F,1,red\na,S,F,2,red\na,S,F,2,blue\n');
    expect(rows.map((r) => r.segment)).toEqual([1, 2]);
    expect(flags.map((f) => [f.severity, f.code])).toEqual([
      ['note', 'sheet-column-unused'],
      ['stop', 'sheet-damaged'],
    ]);
    expect(flags[1].detail).toBe('line 4 names «a» segment 2 again, as line 3 does; only line 3 counts');
  });

  it.each([
    ['', 'the sheet is empty'],
    ['some words\n', 'no header row with file, sample, instrument; it starts with «some words»'],
    ['file,sample\na,b\n', 'no header row'],
    ['a\0b', 'no text'],
  ])('no sheet at all: %j', (text, detail) => {
    const { rows, flags } = scans(text);
    expect(rows).toEqual([]);
    expect(flags[0].detail).toContain(detail);
  });
});

it('instruments.csv in SI', () => {
  const text =
    'instrument;kind;lag [s];lag error [ms];offset [°C];offset error [K];rate min [K/min];rate max [K/s];response time [s];sensitivity [µV/mW]\n' +
    'F;Furnace;-3,5;500;1,2;0,1;1;8;1,75;60\nC;chip;;;;;;;;\nX;oven;;;;;;;;\nF;chip;;;;;;;;\n';
  const { rows, flags } = readInstrumentsSheet(bytesOf(text), 'instruments.csv');
  expect(rows).toEqual([
    {
      instrument: 'F',
      kind: 'furnace',
      lagS: -3.5,
      lagErrorS: 0.5,
      offsetK: 1.2,
      offsetErrorK: 0.1,
      rateMinKPerS: 1 / 60,
      rateMaxKPerS: 8,
      responseS: 1.75,
      sensitivityVPerW: 0.06,
      line: 2,
    },
    { instrument: 'C', kind: 'chip', line: 3 },
  ]);
  expect(flags.map((f) => f.detail)).toEqual([
    'line 4 has «oven» under «kind»: not one of furnace, chip.',
    'line 5 names «F» again, as line 2 does; only line 2 counts',
  ]);
});

it('samples.csv in SI', () => {
  const text =
    'sample\tmelting temperature [°F]\tenthalpy of melting [J/g]\tenthalpy of crystallisation [kJ/kg]\tglass transition [°C]\tfragility\tmolar mass [g/mol]\tgrowth rate [µm/min]\tgrowth temperature [K]\tseries\tsolvent fraction [%]\theat capacity [J/(g K)]\tcooled at heating rate (yes|no)\n' +
    'S\t212\t80\t60\t150\t90\t100\t6\t450\thydrate\t12.5\t1.3\tyes\nbare\nT\t\t\t\t\t\t\t\t\t\t120\t\tno\n';
  const { rows, flags } = readSamplesSheet(bytesOf(text), 'samples.csv');
  expect(rows[0]).toEqual({
    sample: 'S',
    meltingK: expect.closeTo(373.15, 10),
    meltingEnthalpyJPerKg: 80_000,
    crystallizationEnthalpyJPerKg: 60_000,
    glassTransitionK: 423.15,
    fragility: 90,
    molarMassKgPerMol: 0.1,
    growthRateMPerS: expect.closeTo(1e-7, 20),
    growthTemperatureK: 450,
    series: 'hydrate',
    solventFraction: 0.125,
    heatCapacityJPerKgK: 1300,
    cooledAtHeatingRate: true,
    line: 2,
  });
  expect(rows.slice(1)).toEqual([{ sample: 'bare', line: 3 }]);
  expect(flags.map((f) => f.detail)).toEqual([
    'line 4 has «120» under «solvent fraction [%]»: it must lie in 0 … 1 (write % in the header for per cent).',
  ]);
});

describe('what a spreadsheet or a bad copy makes of a sheet', () => {
  it('a line of delimiters only, and a cell of many digits, cost no time', () => {
    const long = scans(`file,sample,instrument\n${','.repeat(2_000_000)}\na.txt,S,F\n`);
    expect(long.rows).toEqual([]);
    expect(long.flags[0].detail).toContain('line 2 has 2000000 characters');
    const started = process.cpuUsage().user;
    const digits = scans(`file,sample,instrument,mass [mg]\na.txt,S,F,${'1'.repeat(60_000)}x\nb.txt,S,F,1\n`);
    expect(process.cpuUsage().user - started).toBeLessThan(1e6);
    expect(digits.rows.map((row) => row.file)).toEqual(['b.txt']);
  });

  it('rows above the header, or none below it, are told', () => {
    const { rows, flags } = scans('a.txt,S,F\nfile,sample,instrument\nb.txt,S,F\n');
    expect(rows.map((row) => row.file)).toEqual(['b.txt']);
    expect(flags.map((f) => f.detail)).toEqual([
      '1 row above the header on line 2 not read, from line 1 on: «a.txt, S, F»',
    ]);
    expect(scans('file,sample,instrument\n').flags[0].detail).toBe('no row stands below the header on line 1');
  });
});
