import { describe, expect, it } from 'vitest';
import { createScanReader, readScan } from '../../jobs/instrument/index.ts';
import type { ReadScan } from '../../schema/wire/scan.ts';
import { encode, plainScan, tableText } from './scan-text.ts';

const utf8 = (text: string): Uint8Array => new TextEncoder().encode(text);

function read(input: string | Uint8Array): ReadScan {
  const outcome = readScan(typeof input === 'string' ? utf8(input) : input, 'S/I/a.txt');
  if (!outcome.ok) throw new Error(`${outcome.refusal.code}: ${outcome.refusal.reason}`);
  return outcome.scan;
}

function refusal(input: string | Uint8Array) {
  const outcome = readScan(typeof input === 'string' ? utf8(input) : input, 'S/I/a.txt');
  if (outcome.ok) throw new Error(`was read: ${outcome.scan.dialect}`);
  expect(outcome.refusal.action).not.toBe('');
  return outcome.refusal;
}

/** 25 rows under the given header lines. */
function under(head: string[], delimiter = ','): string {
  const rows = Array.from({ length: 25 }, (_, i) => [i + 1, 300 + i, 0.5 + ((i * 7) % 5)].join(delimiter));
  return `${[...head, ...rows].join('\n')}\n`;
}

describe('header', () => {
  it.each([
    ['time [s],temperature [K],heat flow [W]', ['s', 'K', 'W']],
    ['Time (min),Temp. (°C),Heat Flow (mW)', ['min', '°C', 'mW']],
    ['t/s,T/K,Φ/mW', ['s', 'K', 'mW']],
    ['T/K,t/ms,dsc/(mW/mg)', ['ms', 'K', 'mW/mg']],
    ['ElapsedTime[s],SampleTemperature[K],HeatFlow[mW]', ['s', 'K', 'mW']],
    ['# Time/min,Temp./°C,DSC/(mW/mg)', ['min', '°C', 'mW/mg']],
    ['TIME [MIN],TEMPERATURE [C],HEAT FLOW [W/g]', ['min', '°C', 'W/g']],
    ['time [µs],temperature [degC],heat_flow [nW]', ['µs', '°C', 'nW']],
    ['time [us],temperature [°F],heat flux [J/(s g)]', ['µs', '°F', 'J/g s']],
    ['Zeit [h],Temperatur [k],Wärmestrom [µV]', ['h', 'K', 'µV']],
    ['Time (s),Temperature (ºC),Heat flow (mW/g) (exo up)', ['s', '°C', 'mW/g']],
    ['time [s],temperature [K],dQ/dt [W kg⁻¹]', ['s', 'K', 'W/kg']],
  ])('%s', (header, units) => {
    expect(read(under([header])).columns.map((c) => c.unit)).toEqual(units);
  });

  it('takes units from the row below, with or without brackets', () => {
    for (const row of ['[s],[K],[mW/mg]', 's,K,mW/mg', '(s),(K),(mW/mg)'])
      expect(read(under(['Time,Temp,Heat Flow', row])).columns.map((c) => c.unit)).toEqual(['s', 'K', 'mW/mg']);
  });

  it('reads runs of spaces under names with single spaces', () => {
    for (const head of [
      ['time [s]   sample temperature [K]   heat flow [mW]'],
      ['time [s] sample temperature [K] heat flow [mW]'],
      ['  time  temperature  heat flow', '  [s]   [K]  [J/(s g)]'],
      ['time temp heat flow', 's K mW'],
    ])
      expect(read(under(head, '   ')).timeS.length).toBe(25);
  });

  it('passes over a preamble of any length, also one that talks of the quantities', () => {
    const preamble = Array.from({ length: 5000 }, (_, i) => `note ${i}: time, temperature and heat flow follow`);
    const scan = read(under([...preamble, '', 'mass [mg];3.2', 'time [s],temperature [K],heat flow [W]']));
    expect(scan.dialect).toBe('UTF-8, comma, decimal point, header line 5003');
  });

  it('chooses the sample temperature and the plain heat flow, and says what it leaves', () => {
    const scan = read(
      `${['program temperature [K],time [s],sample temperature [K],heat flow derivative [mW],reversing heat flow [mW],heat flow [W]', ...Array.from({ length: 25 }, (_, i) => `1,${i},${300 + i},2,3,4`)].join('\n')}\n`,
    );
    expect([scan.temperatureK[3], scan.heatFlow[3]]).toEqual([303, 4]);
    expect(scan.dialect).toContain(
      'columns not used: «program temperature [K]» «heat flow derivative [mW]» «reversing heat flow [mW]»',
    );
  });

  it('refuses an unknown unit, quoting cell and line and offering the known ones', () => {
    const { code, reason, action, line } = refusal(under(['x', 'time [s],temperature [K],heat flow [BTU/h]']));
    expect(code).toBe('unit-unknown');
    expect(reason).toBe('the unit «BTU/h» (line 2) of the heat flow column «heat flow [BTU/h]» is not known');
    expect(action).toContain('W, mW, µW, nW, W/g, mW/mg, mW/g, W/kg, J/(s g), µV');
    expect(line).toBe(2);
    expect(refusal(under(['time,temperature,heat flow', '[s],[furlong],[W]'])).reason).toContain('«furlong» (line 2)');
    expect(refusal(under(['time [s],temperature [K],heat flow [MW]'])).reason).toContain('«MW»');
    expect(refusal(under(['time,temperature [K],heat flow [W]'])).reason).toBe(
      'the time column «time» (line 1) states no unit',
    );
  });

  it('refuses a missing header, quoting the nearest line and naming what it lacks', () => {
    expect(refusal(under(['notes', 'time [s],temperature [K],mass [mg]']))).toMatchObject({
      code: 'file-damaged',
      reason:
        'no header row: line 2 «time [s],temperature [K],mass [mg]» comes nearest, but no cell of it names a heat flow',
      line: 2,
    });
    expect(refusal(under([])).reason).toContain('the text starts with «1,300,0.5» (line 1)');
  });
});

describe('direction of the exotherm', () => {
  const header = 'time [s],temperature [K],heat flow [W]';
  it.each([
    [['exo up', header], 'up'],
    [['Exotherm: down', header], 'down'],
    [['Sign;exothermic peaks are positive', header], 'up'],
    [['# endo up', header], 'down'],
    [['ENDO DOWN', header], 'up'],
    [['exotherm direction = up, endotherm down', header], 'up'],
    [['time [s],temperature [K],heat flow (exo up) [W]'], 'up'],
    [['time [s],temperature [K],^exo heat flow [W]'], 'up'],
    [['time [s],temperature [K],heat flow endo> [W]'], 'down'],
    [['time [s],temperature [K],heat flow [W] exo ↓'], 'down'],
    [['exo up', 'time [s],temperature [K],heat flow (endo up) [W]'], 'down'],
    [['no exotherm up to 500 K', header], undefined],
    [['exo up', 'exo down', header], undefined],
    [[header], undefined],
  ])('%j says %s', (head, direction) => {
    expect(read(under(head as string[])).exotherm).toBe(direction);
  });

  it('two places that contradict each other are told', () => {
    expect(read(under(['exo up', 'exo down', header])).dialect).toContain(
      'contradict each other: line 1 «exo up» against line 2 «exo down»',
    );
  });
});

describe('dialects', () => {
  const row = (i: number) => [String(i), (300 + i / 4).toFixed(2), (i / 8 - 1).toFixed(3)];
  it.each(['utf8', 'utf8-mark', 'utf16le', 'utf16le-mark', 'utf16be', 'utf16be-mark', 'latin1'] as const)(
    '%s with every line end',
    (encoding) => {
      for (const lineEnd of ['\n', '\r', '\r\n'] as const) {
        const dialect = { delimiter: ';', decimal: ',', lineEnd } as const;
        const text = tableText(
          dialect,
          ['Prüfling 20 °C'],
          ['time [µs]', 'temperature [°C]', 'heat flow [µW]'],
          Array.from({ length: 30 }, (_, i) => row(i)),
        );
        const scan = read(encode(text, encoding));
        expect([scan.timeS[29], scan.temperatureK[29], scan.heatFlow[29]]).toEqual([29e-6, 307.25 + 273.15, 2.625e-6]);
        expect(scan.dialect).toContain('semicolon, decimal comma, header line 2');
      }
    },
  );

  it('one damaged byte in UTF-8 does not cost the ° of the header', () => {
    const bytes = encode(`operator X\n${plainScan(30)}`, 'utf8');
    bytes[9] = 0xe4;
    expect(read(bytes).dialect).toContain('UTF-8');
    // The same byte in a text without UTF-8 sequences is an ä.
    const latin = encode(`operator X\n${plainScan(30)}`, 'latin1');
    latin[9] = 0xe4;
    expect(read(latin).dialect).toContain('Latin-1');
  });

  it('reads quoted cells, a typographic minus, and numbers padded with blanks', () => {
    const lines = Array.from({ length: 25 }, (_, i) =>
      i === 3 ? '"3", 3.0e2 ,\u22122.5' : i === 4 ? '"4","301,5","1,5"' : `${i},30${i % 10},1`,
    );
    expect(refusal(`time [s],temperature [K],heat flow [W]\n${lines.join('\n')}\n`).reason).toContain('«301,5»');
    lines[4] = '4,301.5,1.5';
    const scan = read(`time [s],temperature [K],heat flow [W]\n${lines.join('\n')}\n`);
    expect([scan.temperatureK[3], scan.heatFlow[3]]).toEqual([300, -2.5]);
  });

  it('reads quoted decimal commas between commas', () => {
    const lines = Array.from({ length: 25 }, (_, i) => `"${i},5","300,25","-1,5"`);
    const scan = read(`"time [s]","temperature [K]","heat flow [W]"\n${lines.join('\n')}\n`);
    expect([scan.timeS[3], scan.temperatureK[3], scan.heatFlow[3]]).toEqual([3.5, 300.25, -1.5]);
  });

  it('does not take decimal commas between commas for more columns', () => {
    const lines = Array.from({ length: 25 }, (_, i) => `${i},5,300,2,1,5`);
    expect(refusal(`time [s],temperature [K],heat flow [W]\n${lines.join('\n')}\n`).reason).toContain(
      'line 2 «0,5,300,2,1,5» has 6 cells under a header of 3: if commas are decimal marks here',
    );
  });

  it('chunks of any size give the same scan', () => {
    const bytes = encode(plainScan(200).replaceAll('\n', '\r\n'), 'utf8');
    const wide = encode(plainScan(200).replaceAll('\n', '\r\n'), 'utf16be');
    for (const whole of [bytes, wide])
      for (const size of [1, 2, 3, 7, 64, 1000]) {
        const reader = createScanReader('S/I/a.txt');
        for (let at = 0; at < whole.length; at += size) reader.push(whole.slice(at, at + size));
        expect(reader.end()).toEqual(readScan(whole, 'S/I/a.txt'));
      }
    expect(read(bytes).flags).toEqual([]);
  });

  it('chunks beyond the head give the same scan and the same line numbers', () => {
    const text = plainScan(6000, (cells, i) => (i === 5500 ? ['x', '', ''] : cells)).replaceAll('\n', '\r\n');
    for (const whole of [encode(text, 'latin1'), encode(text, 'utf16le-mark')])
      for (const size of [1009, 65_537]) {
        const reader = createScanReader('S/I/a.txt');
        for (let at = 0; at < whole.length; at += size) reader.push(whole.slice(at, at + size));
        const outcome = reader.end();
        expect(outcome).toEqual(readScan(whole, 'S/I/a.txt'));
        expect(outcome.ok && outcome.scan.flags[0].detail).toContain('line 5502 «x,,»');
      }
  });
});

describe('files that are no scans', () => {
  it.each([
    ['', 'the file is empty (0 bytes)'],
    [' \n\r\n\t ', 'nothing but blanks'],
    ['\ufeff', 'nothing but blanks'],
    ['time [s],temperature [K],heat flow [W]\n', 'the header (line 1) is there, but nothing follows it'],
    [
      'time [s],temperature [K],heat flow [W]\na,b,c\nd,e,f\n',
      'none is a row of numbers: line 2 «a,b,c» has no number as time: «a»',
    ],
    [under(['time [s],temperature [K],heat flow [W]']).split('\n').slice(0, 20).join('\n'), 'only 19 rows of numbers'],
  ])('%j', (text, reason) => {
    expect(refusal(text).reason).toContain(reason);
  });

  it('binary bytes, with what they look like', () => {
    expect(refusal(new Uint8Array([0x50, 0x4b, 3, 4, 1, 2, 3])).reason).toContain('a zip archive or a workbook');
    expect(refusal(Uint8Array.from({ length: 5000 }, (_, i) => (i * 7919) % 256)).reason).toContain('binary data');
  });

  it('more than five million rows', () => {
    const reader = createScanReader('S/I/a.txt');
    reader.push(utf8(plainScan(100)));
    const rows = utf8('7,7,7\n'.repeat(50_000));
    for (let i = 0; i < 100; i++) reader.push(rows);
    const outcome = reader.end();
    expect(outcome.ok ? undefined : outcome.refusal.reason).toBe('more than 5000000 rows (line 5000002)');
  });

  it('lines beyond 64 kB, in the head and among the rows', () => {
    expect(refusal('x'.repeat(70_000)).reason).toBe('line 1 is longer than 65536 bytes');
    const long = plainScan(30, (cells, i) => (i === 20 ? [...cells.slice(0, 2), '0'.repeat(70_000)] : cells));
    expect(refusal(plainScan(5000).repeat(1) + long.split('\n').slice(1).join('\n')).reason).toBe(
      'line 5022 is longer than 65536 bytes',
    );
  });
});
