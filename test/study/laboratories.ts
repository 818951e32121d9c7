import { existsSync, readdirSync, readFileSync } from 'node:fs';
import { readScan } from '../../jobs/instrument/index.ts';
import { reduceScan } from '../../jobs/reduction/index.ts';
import { markdownTable } from './table.ts';

/**
 * Measured scans of black cast poly(methyl methacrylate) from three laboratories (MaCFP matl-db, commit 14b73ea, MIT licence), beside the
 * checkout. File names hold laboratory and rate in K/min.
 */
const FOLDER = new URL('../../../shared/reference/raw/pmma-dsc/', import.meta.url);
/** Where the step is expected, K: 105 °C is the usual value (common practice, no source); the range of a scan must cover this. */
const EXPECTED_K = { from: 363, to: 403 };

export interface LaboratoryScan {
  file: string;
  laboratory: string;
  ratePerMin: number;
  rows: number;
  /** Rows from 363 to 403 K on the way up */
  rowsInRange: number;
  onsetK?: number;
  midpointK?: number;
  /** Why there is no glass transition, as the user is told */
  doubt?: string;
  outcome: string;
}

export const hasLaboratories = (): boolean => existsSync(FOLDER);

/** Every scan read and reduced with the exotherm down, as all three laboratories show the endothermic decomposition upwards. */
export function reduceLaboratories(): LaboratoryScan[] {
  const files = readdirSync(FOLDER).filter((name) => name.endsWith('.csv'));
  return files.map((file) => {
    const laboratory = file.split('__')[0];
    const ratePerMin = Number(/_(\d+)K_/.exec(file)?.[1]);
    const read = readScan(readFileSync(new URL(file, FOLDER)), file);
    if (!read.ok)
      return { file, laboratory, ratePerMin, rows: 0, rowsInRange: 0, outcome: `not read: ${read.refusal.reason}` };
    const { temperatureK } = read.scan;
    const rowsInRange = temperatureK.filter((T) => T > EXPECTED_K.from && T < EXPECTED_K.to).length;
    const base = { file, laboratory, ratePerMin, rows: temperatureK.length, rowsInRange };
    const outcome = reduceScan(read.scan, {
      file,
      sample: 'PMMA',
      role: 'sample',
      exotherm: 'down',
      calibration: {
        instrument: laboratory,
        kind: 'furnace',
        source: 'prior',
        offsetK: 0,
        offsetSeK: 1,
        lagS: 0,
        lagSeS: 1,
        standards: 0,
      },
    });
    if (!outcome.ok) return { ...base, outcome: outcome.reason };
    const { reduced } = outcome;
    const { glassTransitionOnsetK: onsetK, glassTransitionK: midpointK } = reduced;
    const { kind, startK, endK, rateKPerS } = reduced.segments[reduced.segment - 1];
    const segment = `${kind} ${startK.toFixed(0)} to ${endK.toFixed(0)} K at ${(60 * rateKPerS).toFixed(1)} K/min`;
    const doubt = reduced.flags.find(({ code }) => code === 'glass-transition-doubtful')?.detail;
    const glass = midpointK !== undefined && { onsetK, midpointK };
    return { ...base, outcome: segment, ...glass, ...(doubt !== undefined && { doubt }) };
  });
}

function groupBy<T, K>(items: readonly T[], key: (item: T) => K): Map<K, T[]> {
  const groups = new Map<K, T[]>();
  for (const item of items) groups.set(key(item), [...(groups.get(key(item)) ?? []), item]);
  return groups;
}

export function laboratoriesStudy(): string {
  if (!hasLaboratories()) return 'The measured scans do not stand beside the checkout: nothing done.';
  const scans = reduceLaboratories();
  const show = (value: number | undefined) => (value === undefined ? '–' : value.toFixed(1));
  const groups = groupBy(scans, (s) => `${s.laboratory} ${s.ratePerMin}`);
  const spread = (values: number[]) =>
    values.length > 1 ? (Math.max(...values) - Math.min(...values)).toFixed(1) : '–';
  const mean = (values: number[]) => (values.length ? values.reduce((a, b) => a + b, 0) / values.length : undefined);
  const byGroup = [...groups.values()]
    .sort((a, b) => a[0].ratePerMin - b[0].ratePerMin)
    .map((of) => {
      const found = of.flatMap((s) => s.midpointK ?? []);
      const onsets = of.flatMap((s) => s.onsetK ?? []);
      const { laboratory, ratePerMin } = of[0];
      return [
        ratePerMin,
        laboratory,
        `${found.length} of ${of.length}`,
        show(mean(onsets)),
        show(mean(found)),
        spread(found),
      ];
    });
  const byRate = [...groupBy(scans, (s) => s.ratePerMin)]
    .sort(([a], [b]) => a - b)
    .flatMap(([rate, of]) => {
      const means = [...groupBy(of, (s) => s.laboratory).values()].flatMap(
        (own) => mean(own.flatMap((s) => s.midpointK ?? [])) ?? [],
      );
      return means.length > 1 ? [`- ${rate} K/min: ${spread(means)} K between ${means.length} laboratories`] : [];
    });
  return [
    `${scans.length} measured scans, ${scans.filter((s) => s.rows > 0).length} read; uncorrected (no standards were published with them).`,
    markdownTable(
      ['file', 'rows', 'rows 363 to 403 K', 'analysed', 'Tg onset, K', 'Tg midpoint, K', 'why none'],
      scans.map((s) => [s.file, s.rows, s.rowsInRange, s.outcome, show(s.onsetK), show(s.midpointK), s.doubt ?? '']),
    ),
    markdownTable(['K/min', 'laboratory', 'found', 'mean onset, K', 'mean midpoint, K', 'spread within, K'], byGroup),
    ['Spread of the mean midpoints between laboratories:', ...(byRate.length ? byRate : ['- no rate with two'])].join(
      '\n',
    ),
  ].join('\n\n');
}
