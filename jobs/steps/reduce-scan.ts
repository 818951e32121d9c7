import { type Flag, flag } from '../../schema/wire/flags.ts';
import type { ReduceOutcome } from '../../schema/wire/reduced.ts';
import { decodeReduceOutcome, encodeReduceOutcome, summarizeReduced } from '../../schema/wire/reduced-blob.ts';
import type { InstrumentCalibration, InstrumentSheetRow, ReadScan } from '../../schema/wire/scan.ts';
import type { ReduceInput } from '../../schema/wire/step-inputs.ts';
import type { Ports } from '../ports/index.ts';
import { hashOf } from '../store/ids.ts';
import { type ClaimedJob, completeJob } from '../store/leases.ts';
import { type FileRow, loadReduction, type ReductionRows, saveReduction } from '../store/scan-rows.ts';
import { type ColumnsCache, loadColumns, readColumns } from './columns.ts';
import { findReference, type ReferenceProblem, unreadable } from './find-reference.ts';
import { readDerived } from './read-derived.ts';
import { STEP_VERSIONS } from './settings.ts';

/** What a reduction stores on its scan. */
export type FoundReduction = Parameters<typeof saveReduction>[1];

/** Step `reduce-scan`: one scan to events and curves, kept as a blob under the hash of everything that went in. */
export async function reduceStoredScan(ports: Ports, job: ClaimedJob, cache: ColumnsCache): Promise<void> {
  const rows = await loadReduction(ports, job.subject);
  if (rows?.scan.status !== 'read') return completeJob(ports, job);
  const found = await reduceRows(ports, rows, () => loadColumns(ports, rows.file, cache));
  if (!found) return completeJob(ports, job);
  const check = { samples: true, instruments: rows.scan.role === 'standard' };
  await completeJob(ports, job, () => saveReduction(rows.scan, found), check);
}

/** Reduces the scan of these rows or looks the result up; undefined where it has no sample or calibration yet. */
export async function reduceRows(
  ports: Ports,
  rows: ReductionRows,
  columns: () => ReadScan | Promise<ReadScan>,
): Promise<FoundReduction | undefined> {
  const input = reduceInputOf(rows);
  if (!input) return undefined;
  const { campaignId, sha256 } = rows.file;
  const reference = await findReference(ports, rows);
  const subtracted = reference && ('problem' in reference ? reference : [reference.path, reference.sha256]);
  const versions = [STEP_VERSIONS['reduce-scan'], STEP_VERSIONS['read-scan']];
  const hash = hashOf(['reduce-scan', ...versions, sha256, input, ...(subtracted ? [subtracted] : [])]);
  const reducedKey = `derived/${campaignId}/reduced-${hash}`;
  let outcome = await readDerived(ports, reducedKey, decodeReduceOutcome);
  if (!outcome) {
    outcome = await reduceOrRefuse(ports, input, reference, columns);
    await ports.blobs.put(reducedKey, encodeReduceOutcome(outcome));
  }
  if (!outcome.ok) {
    const flags = refusalFlags(outcome, input);
    return { status: 'set_aside', reason: outcome.reason, reducedKey, result: null, flags };
  }
  const { reduced } = outcome;
  return { status: 'reduced', reason: null, reducedKey, result: summarizeReduced(reduced), flags: reduced.flags };
}

async function reduceOrRefuse(
  ports: Ports,
  input: ReduceInput,
  reference: FileRow | ReferenceProblem | undefined,
  columns: () => ReadScan | Promise<ReadScan>,
): Promise<ReduceOutcome> {
  if (!reference) return ports.compute.reduceScan(await columns(), input);
  const refuse = ({ problem, action }: ReferenceProblem): ReduceOutcome => ({
    ok: false,
    code: 'reference-unused',
    reason: problem,
    action,
    flags: [],
  });
  if ('problem' in reference) return refuse(reference);
  const read = await readColumns(ports, reference);
  if (!read.ok) return refuse(unreadable(reference.path, read.refusal.reason));
  return ports.compute.reduceScan(await columns(), { ...input, reference: read.scan });
}

/** A standard is reduced before its instrument is calibrated: nothing of the correction is taken off. */
const uncorrected = (instrument: string, row: InstrumentSheetRow | null): InstrumentCalibration => ({
  instrument,
  kind: 'furnace',
  source: 'prior',
  offsetK: 0,
  offsetSeK: 0,
  lagS: 0,
  lagSeS: 0,
  ...(row?.sensitivityVPerW !== undefined && { sensitivityVPerW: row.sensitivityVPerW }),
  standards: 0,
});

function reduceInputOf(rows: ReductionRows): ReduceInput | undefined {
  const { scan, file, sampleRow, instrumentRow } = rows;
  if (scan.sample === null || scan.instrument === null) return undefined;
  const calibration = scan.role === 'standard' ? uncorrected(scan.instrument, instrumentRow) : rows.calibration;
  if (calibration === null) return undefined;
  const row = scan.sheetRow;
  return {
    file: file.path,
    sample: scan.sample,
    role: scan.role,
    ...(row?.rateKPerS !== undefined && { rateNominalKPerS: row.rateKPerS }),
    ...(row?.massKg !== undefined && { massKg: row.massKg }),
    ...(row?.exotherm !== undefined && { exotherm: row.exotherm }),
    ...(scan.segment !== null && { segment: scan.segment }),
    ...(row?.limitsK !== undefined && { limitsK: row.limitsK }),
    calibration,
    ...(sampleRow?.meltingK !== undefined && { meltingK: sampleRow.meltingK }),
    ...(sampleRow?.crystallizationEnthalpyJPerKg !== undefined && {
      crystallizationEnthalpyJPerKg: sampleRow.crystallizationEnthalpyJPerKg,
    }),
    ...(sampleRow?.heatCapacityJPerKgK !== undefined && { heatCapacityJPerKgK: sampleRow.heatCapacityJPerKgK }),
  };
}

/** The flags of a scan that was set aside say the reason too, also where the reduction gave it only as its outcome. */
function refusalFlags(outcome: Extract<ReduceOutcome, { ok: false }>, input: ReduceInput): Flag[] {
  const { code, reason, action, flags } = outcome;
  if (flags.some((found) => found.code === code)) return flags;
  return [flag(code, reason, action, { file: input.file, sample: input.sample }), ...flags];
}
