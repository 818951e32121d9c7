import type { FitScan } from '../../schema/wire/parameters.ts';
import type { ReducedEvent } from '../../schema/wire/reduced.ts';
import type { Ports } from '../ports/index.ts';
import { matchEvents } from '../reduction/index.ts';
import { type FitRows, type FitScanRow, loadFit, type PeakRow, type ScanEventNumbers } from '../store/fit-rows.ts';
import { hashOf } from '../store/ids.ts';
import { readReduced } from '../store/lost-blobs.ts';
import { compareText } from './assign-scans.ts';
import { FIT_DRAWS, STEP_VERSIONS } from './settings.ts';

/** What fit, verdict and forecast of a sample start from, in the order of content, not of arrival. */
export async function loadOrderedFit(ports: Ports, sampleId: string): Promise<FitRows | undefined> {
  const rows = await loadFit(ports, sampleId);
  rows?.scans.sort((a, b) => compareText(orderOf(a), orderOf(b)));
  rows?.peaks.sort((a, b) => compareText(hashOf(peakValues(a)), hashOf(peakValues(b))));
  rows?.calibrations.sort((a, b) => compareText(a.instrument, b.instrument));
  return rows;
}

/** Order of scans by content, not by path: a renamed file changes no result. */
const orderOf = ({ sha256, instrument, sheetRow }: FitScanRow) => `${sha256} ${sheetRow?.segment ?? 0} ${instrument}`;

/** What the sheets say of a scan, without where they say it. */
const sheetValues = ({ sha256, instrument, sheetRow }: FitScanRow) => [
  sha256,
  instrument,
  sheetRow && { ...sheetRow, file: undefined, line: undefined, note: undefined },
];

const peakValues = ({ row }: PeakRow) => ({ ...row, line: undefined });

/** Seed of the draws: sorted input hashes, sheet values, step version and settings; never ids, paths or order of arrival. */
export function seedOf({ scans, peaks, calibrations, sampleRow }: FitRows): string {
  const values = [
    scans.map(sheetValues),
    peaks.map(peakValues),
    calibrations,
    sampleRow && { ...sampleRow, line: undefined },
  ];
  const { 'read-scan': read, 'reduce-scan': reduce, 'fit-sample': fit } = STEP_VERSIONS;
  return hashOf(['fit-sample', [read, reduce, fit], FIT_DRAWS, values]);
}

/** The seed, and the paths and lines, which flags quote. */
export const inputsKeyOf = (rows: FitRows): string =>
  hashOf([
    seedOf(rows),
    rows.sample.sample,
    rows.scans.map(({ path, reducedKey }) => [path, reducedKey]),
    rows.peaks.map(({ path, row }) => [path, row.line]),
  ]);

/** The events of a sample's scans, numbered alike over all of them, and its rows of peaks.csv as events without a curve. */
export async function loadFitScans(
  ports: Ports,
  rows: FitRows,
): Promise<{ scans: FitScan[]; eventNumbers: ScanEventNumbers[] }> {
  const reduced = await Promise.all(
    rows.scans.map(async ({ path, reducedKey }) => {
      const outcome = await readReduced(ports, reducedKey);
      if (outcome.ok) return outcome.reduced;
      throw new Error(`${path} counts as reduced, but blob ${reducedKey} holds a refusal: ${outcome.reason}`);
    }),
  );
  const { numbers } = matchEvents(reduced.map(({ events }, i) => ({ key: rows.scans[i].path, events })));
  const scans = rows.scans.flatMap(({ path, sha256, instrument, sheetRow }, i) =>
    reduced[i].events.map(
      (event, k): FitScan => ({
        file: path,
        sha256,
        segment: reduced[i].segment,
        instrument,
        ...(sheetRow?.replicate !== undefined && { replicate: sheetRow.replicate }),
        event: { ...event, event: numbers[i][k] },
      }),
    ),
  );
  return {
    scans: [...scans, ...rows.peaks.flatMap(peakScan)],
    eventNumbers: rows.scans.map(({ scanId }, i) => ({ scanId, numbers: numbers[i] })),
  };
}

/** A peak without its curve: what the table says, and nothing of what only a curve could say. */
function peakScan(peak: PeakRow): FitScan[] {
  const { path, row } = peak;
  if (row.peakK === undefined) return [];
  const event: ReducedEvent = {
    event: row.event ?? 1,
    kind: row.rateKPerS > 0 ? 'heating' : 'cooling',
    rateKPerS: row.rateKPerS,
    onsetK: row.onsetK ?? Number.NaN,
    peakK: row.peakK,
    endK: Number.NaN,
    widthK: Number.NaN,
    centroidK: Number.NaN,
    peakErrorK: row.peakErrorK ?? Number.NaN,
    area: Number.NaN,
    areaError: Number.NaN,
    usableFrom: 0.01,
    usableTo: 0.99,
    pointsOverWidth: 0,
    noiseFraction: 0,
    rampStartK: Number.NaN,
  };
  return [
    {
      file: `${path} line ${row.line}`,
      sha256: hashOf(peakValues(peak)),
      segment: 1,
      instrument: row.instrument,
      ...(row.replicate !== undefined && { replicate: row.replicate }),
      event,
    },
  ];
}
