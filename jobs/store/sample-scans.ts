import { and, asc, eq } from 'drizzle-orm';
import { files, scans } from '../../schema/tables/index.ts';
import type { ScanState } from '../../schema/wire/states.ts';
import type { Ports } from '../ports/index.ts';

export interface SampleScan {
  id: string;
  file: string;
  instrument: string;
  status: ScanState;
}

/** The scans of a sample with their files, those of standards and blanks apart, ordered by file and id. */
export async function listSampleScans(ports: Ports, campaignId: string, sample: string): Promise<SampleScan[]> {
  const rows = await ports.database.read
    .select({ id: scans.id, file: files.path, instrument: scans.instrument, status: scans.status })
    .from(scans)
    .innerJoin(files, eq(scans.fileId, files.id))
    .where(and(eq(scans.campaignId, campaignId), eq(scans.sample, sample), eq(scans.role, 'sample')))
    .orderBy(asc(files.path), asc(scans.id));
  return rows.map((row) => ({ ...row, instrument: row.instrument ?? '' }));
}
