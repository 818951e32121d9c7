import { type Flag, flag, quote } from '../../schema/wire/flags.ts';
import type { PeakSheetRow } from '../../schema/wire/forecasts.ts';
import type { InstrumentSheetRow } from '../../schema/wire/scan.ts';
import type { Role, ScanState } from '../../schema/wire/states.ts';
import { sheetKind } from '../instrument/index.ts';
import type { Ports } from '../ports/index.ts';
import {
  type AssignedScan,
  type AssignmentRows,
  deleteScan,
  followFiles,
  type InstrumentChanges,
  insertScan,
  loadAssignment,
  reassignScan,
  replaceFlags,
  type StoredFile,
  savePeaksHashes,
  settleInstruments,
  settleSamples,
} from '../store/assignment-rows.ts';
import { endCorrections, loadCorrections, moveCorrections, type StoredCorrection } from '../store/correction-rows.ts';
import { hashOf } from '../store/ids.ts';
import { queueReductions } from '../store/job-rows.ts';
import { type ClaimedJob, completeJob } from '../store/leases.ts';
import {
  loadCompositions,
  loadGoals,
  loadPrograms,
  loadQuestionsHash,
  loadViscosities,
  saveQuestions,
} from '../store/question-rows.ts';
import { assignScans, type WantedScan } from './assign-scans.ts';
import { diffScans, type HashedScan, hashScanSheet, type ScanChanges } from './diff-scans.ts';

/** Step `assign-scans`: makes the scans of a campaign what its files and sheets say, and queues only what changed. */
export async function assignCampaign(ports: Ports, job: ClaimedJob): Promise<void> {
  const rows = await loadAssignment(ports, job.campaignId);
  const fileOf = new Map(rows.files.map((file) => [file.id, file]));
  const dataFiles = rows.files.filter((file) => file.kind === 'data');
  const sheetPresent = rows.files.some((file) => file.kind === 'sheet' && sheetKind(file.path) === 'scans');
  const { scans, flags, ended, moved } = assignScans(
    dataFiles,
    sheetPresent ? rows.sheets.scans : undefined,
    ports.paths.assignment,
    await loadCorrections(ports, job.campaignId),
  );
  const sampleRows = new Map([...rows.sheets.samples].reverse().map((row) => [row.sample, row]));
  const instrumentRows = new Map([...rows.sheets.instruments].reverse().map((row) => [row.instrument, row]));
  flags.push(
    ...repeatedRows('samples', rows.sheets.samples, (row) => row.sample),
    ...repeatedRows('instruments', rows.sheets.instruments, (row) => row.instrument),
  );
  const wanted: HashedScan[] = scans.map((scan) => ({
    ...scan,
    sheetHash: hashScanSheet(
      scan,
      scan.sample === null ? undefined : sampleRows.get(scan.sample),
      scan.instrument === null ? undefined : instrumentRows.get(scan.instrument),
    ),
  }));
  const changes = diffScans(rows.scans, wanted);
  const peaks = hashPeaks(rows.sheets.peaks);
  const questionsHash = hashOf(await loadQuestions(ports, job.campaignId, rows));
  const asked = questionsHash !== (await loadQuestionsHash(ports, job.campaignId));
  const placed = (scan: HashedScan): AssignedScan => placeScan(scan, fileOf.get(scan.fileId) as StoredFile);
  await completeJob(
    ports,
    job,
    (db, now) => [
      ...changes.insert.map((scan) => insertScan(job.campaignId, placed(scan))),
      ...changes.update.map(({ id, wanted: scan }) => reassignScan(id, placed(scan))),
      ...changes.remove.map((scan) => deleteScan(db, scan.id)),
      ...followFiles(db, job.campaignId),
      ...settleSamples(
        db,
        job.campaignId,
        [...new Set([...namedSamples(wanted), ...peaks.keys()])].sort(),
        [...new Set([...changedNames(changes, 'sample'), ...changedPeaks(rows.peaksHashes, peaks)])].sort(),
      ),
      ...savePeaksHashes(
        db,
        job.campaignId,
        changedPeaks(rows.peaksHashes, peaks).map((sample) => [sample, peaks.get(sample) ?? '']),
      ),
      ...(asked ? saveQuestions(db, job.campaignId, now, questionsHash) : []),
      ...settleInstruments(db, job.campaignId, instrumentChanges(rows, instrumentRows, wanted, changes)),
      ...replaceFlags(db, job.campaignId, 'assign', flags),
      ...moveCorrections(db, moved),
      ...endCorrections(
        db,
        job.campaignId,
        now,
        ended.map((end) => ({ ...end, scanId: scanOf(rows, end.correction) })),
      ),
      ...queueReductions(job.campaignId, now),
    ],
    { instruments: true, samples: true },
  );
}

/** Hash of what peaks.csv says of each sample that it names. */
function hashPeaks(rows: readonly PeakSheetRow[]): Map<string, string> {
  const bySample = new Map<string, string[]>();
  for (const row of rows) bySample.set(row.sample, [...(bySample.get(row.sample) ?? []), hashOf(row)]);
  return new Map([...bySample].map(([sample, hashes]) => [sample, hashOf(hashes)]));
}

/** Samples whose rows of peaks.csv are others than before. */
const changedPeaks = (before: ReadonlyMap<string, string>, now: ReadonlyMap<string, string>): string[] =>
  [...new Set([...before.keys(), ...now.keys()])]
    .filter((sample) => (before.get(sample) ?? '') !== (now.get(sample) ?? ''))
    .sort();

/** What verdicts and forecasts rest on beside the scans. */
async function loadQuestions(ports: Ports, campaignId: string, { sheets }: AssignmentRows): Promise<unknown> {
  return [
    await loadGoals(ports, campaignId),
    await loadViscosities(ports, campaignId),
    await loadCompositions(ports, campaignId),
    (await loadPrograms(ports, campaignId)).map(({ path, sha256 }) => [path, sha256]),
    sheets.instruments.map(({ instrument, rateMinKPerS, rateMaxKPerS }) => ({
      instrument,
      rateMinKPerS,
      rateMaxKPerS,
    })),
  ];
}

/** The stored scan that a correction was made on. */
function scanOf(rows: AssignmentRows, { sha256, segment }: StoredCorrection): string | undefined {
  const files = new Set(rows.files.filter((file) => file.sha256 === sha256).map((file) => file.id));
  return rows.scans.find((scan) => files.has(scan.fileId) && (scan.said?.segment ?? null) === segment)?.id;
}

/** Of several rows with one name the first counts; the others are said. */
function repeatedRows<T extends { line: number }>(
  sheet: string,
  rows: readonly T[],
  nameOf: (row: T) => string,
): Flag[] {
  const first = new Map<string, T>();
  return rows.flatMap((row) => {
    const before = first.get(nameOf(row));
    if (!before) {
      first.set(nameOf(row), row);
      return [];
    }
    return flag(
      'sheet-damaged',
      `Line ${row.line} of the ${sheet} sheet names ${quote(nameOf(row))} again, after line ${before.line}. The first row counts.`,
      'Remove one of the two rows.',
      { file: `${sheet}.csv` },
    );
  });
}

/** The state that a scan starts from in its new place. */
function placeScan(
  { fileId, disposition, sample, instrument, role, segment, said, sheetRow, sheetHash, reason, flags }: HashedScan,
  file: StoredFile,
): AssignedScan {
  const place = { fileId, disposition, sample, instrument, role, segment, said, sheetRow, sheetHash, flags };
  if (disposition === 'duplicate') return { ...place, status: 'set_aside', reason };
  if (file.state === 'refused') return { ...place, status: 'set_aside', reason: file.reason };
  if (file.state === 'failed') return { ...place, status: 'failed', reason: file.reason };
  if (disposition === 'unassigned') return { ...place, status: 'unassigned', reason };
  if (sheetRow?.excluded !== undefined) return { ...place, status: 'excluded', reason: sheetRow.excluded };
  const status: ScanState = file.state === 'read' ? 'read' : 'received';
  return { ...place, status, reason: null };
}

const isSampleScan = (scan: WantedScan) =>
  scan.disposition === 'assigned' && scan.role === 'sample' && scan.sample !== null;

const namedSamples = (wanted: readonly WantedScan[]): string[] =>
  [...new Set(wanted.filter(isSampleScan).map((scan) => scan.sample as string))].sort();

/** Samples or instruments that gained, lost or kept a changed scan, of one role or of any. */
function changedNames(changes: ScanChanges, field: 'sample' | 'instrument', role?: Role): string[] {
  const touched = [
    ...changes.insert,
    ...changes.update.flatMap(({ before, wanted }) => [before, wanted]),
    ...changes.remove,
  ].filter((scan) => role === undefined || scan.role === role);
  return [...new Set(touched.map((scan) => scan[field]).filter((name) => name !== null))].sort();
}

function instrumentChanges(
  rows: AssignmentRows,
  sheet: ReadonlyMap<string, InstrumentSheetRow>,
  wanted: readonly WantedScan[],
  changes: ScanChanges,
): InstrumentChanges {
  const used = wanted.filter((scan) => scan.disposition === 'assigned').map((scan) => scan.instrument as string);
  const names = new Set([...used, ...rows.sheets.peaks.map((row) => row.instrument), ...sheet.keys()]);
  const stored = new Map(rows.instruments.map((row) => [row.instrument, row]));
  const moved = new Set(changedNames(changes, 'instrument'));
  const withStandards = new Set(changedNames(changes, 'instrument', 'standard'));
  const said = (row: InstrumentSheetRow | null | undefined) => hashOf(row ? { ...row, line: undefined } : null);
  const result: InstrumentChanges = { insert: [], update: [], remove: [] };
  for (const instrument of [...names].sort()) {
    const sheetRow = sheet.get(instrument) ?? null;
    const before = stored.get(instrument);
    if (!before) result.insert.push({ instrument, sheetRow });
    else if (
      said(before.sheetRow) !== said(sheetRow) ||
      (sheetRow?.kind === undefined && moved.has(instrument)) ||
      withStandards.has(instrument)
    ) {
      result.update.push({ id: before.id, sheetRow });
    }
  }
  result.remove = rows.instruments.filter((row) => !names.has(row.instrument)).map((row) => row.id);
  return result;
}
