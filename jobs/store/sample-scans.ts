import type { ScanState } from '../../schema/wire/states.ts';
import type { Ports } from '../ports/index.ts';
import { allRows, text } from './statement.ts';

export interface SampleScan {
  id: string;
  file: string;
  instrument: string;
  status: ScanState;
}

/** The scans of a sample with their files, those of standards and blanks apart, ordered by file and id. */
export async function listSampleScans(ports: Ports, campaignId: string, sample: string): Promise<SampleScan[]> {
  const rows = await allRows<Omit<SampleScan, 'instrument'> & { instrument: string | null }>(
    ports.database.read,
    text`
      select s.id as id, path as file, instrument, status from scans s join files f on f.id = file_id
      where s.campaign_id = ${campaignId} and sample = ${sample} and role = 'sample' order by path, s.id`,
  );
  return rows.map((row) => ({ ...row, instrument: row.instrument ?? '' }));
}
