import { createHash } from 'node:crypto';
import { describe, expect, test } from 'vitest';
import { buildDemoCampaign } from '../../jobs/simulate/index.ts';
import { FLAG_CODES } from '../../schema/wire/flags.ts';

describe('the demo campaign', () => {
  const demo = buildDemoCampaign();
  const text = (path: string): string => new TextDecoder().decode(demo.files.find((f) => f.path === path)?.bytes);
  const sheetFiles = text('scans.csv')
    .trim()
    .split('\n')
    .slice(1)
    .map((line) => line.split(',')[0]);

  test('is the same on every call', () => {
    const digest = ({ files, truth, flaws }: ReturnType<typeof buildDemoCampaign>) => [
      files.map((f) => [f.path, createHash('sha256').update(f.bytes).digest('hex')]),
      truth,
      flaws,
    ];
    expect(digest(buildDemoCampaign())).toEqual(digest(demo));
  });

  test('has three samples of at least eight good scans, two straight and one bent over more than five decades', () => {
    expect(demo.truth.map((t) => [t.sample, t.scanCount >= 8, t.energyKJPerMol])).toEqual([
      ['synthetic-film', true, undefined],
      ['synthetic-ribbon', true, 310],
      ['synthetic-excipient', true, 190],
    ]);
    const [film] = demo.truth;
    const energies = film.localEnergies.map((e) => e.energyKJPerMol);
    expect(energies[0]).toBeGreaterThan(255);
    expect(energies[2]).toBeLessThan(158);
    const rates = text('scans.csv')
      .split('\n')
      .filter((l) => l.includes('synthetic-film'))
      .map((l) => Number(l.split(',')[4]));
    expect(Math.log10(Math.max(...rates) / Math.min(...rates))).toBeGreaterThan(5);
  });

  test('sheets come first and name every file, and every file says that it is synthetic', () => {
    expect(demo.files.slice(0, 3).map((f) => f.path)).toEqual(['scans.csv', 'instruments.csv', 'samples.csv']);
    const data = demo.files.slice(3);
    expect(data.map((f) => f.path).sort()).toEqual([...sheetFiles].sort());
    for (const { path, bytes } of data) {
      const wide = new TextDecoder('utf-16le').decode(bytes.subarray(0, 400));
      const narrow = new TextDecoder('latin1').decode(bytes.subarray(0, 400));
      expect(`${wide}${narrow}`, path).toContain('SYNTHETIC');
      expect(path).toMatch(/^synthetic-/);
    }
  });

  test('plants a missing decade, a wrong rate, a scan without a sign and a damaged file, by codes that exist', () => {
    expect(demo.flaws.map((f) => f.code)).toEqual([
      'decade-gap',
      'instruments-not-bridged',
      'rate-off-nominal',
      'sign-inferred',
      'file-damaged',
    ]);
    for (const flaw of demo.flaws) {
      expect(FLAG_CODES).toHaveProperty([flaw.code]);
      if (flaw.file) expect(sheetFiles).toContain(flaw.file);
    }
  });
});
