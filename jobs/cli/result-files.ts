import { open, rename, writeFile } from 'node:fs/promises';
import { join } from 'node:path';
import { writeReport } from '../../api/report.ts';
import { csvHeader, csvRow, RESULT_TABLES, type ResultTable } from '../../schema/wire/result-tables.ts';
import type { Ports } from '../ports/index.ts';
import { type Campaign, readCurrentTable } from '../store/index.ts';

const TABLES = Object.keys(RESULT_TABLES) as ResultTable[];

/** Text gathered before it is written, characters. */
const CHUNK = 1 << 16;

/**
 * Writes every result table as `TABLE.csv`, of what is there now: scans of files that were replaced or are gone are left
 * out. Each file is written beside its place and renamed over it whole, so that a
 * reader never sees half a table and an interrupted run leaves the older one.
 * @returns rows written a table
 */
export async function writeResultTables(
  ports: Ports,
  campaignId: string,
  folder: string,
): Promise<Record<ResultTable, number>> {
  const counts = {} as Record<ResultTable, number>;
  for (const table of TABLES) {
    const path = join(folder, `${table}.csv`);
    const file = await open(`${path}.part`, 'w');
    try {
      let text = csvHeader(table);
      let rows = 0;
      for await (const row of readCurrentTable(ports, campaignId, table)) {
        text += csvRow(table, row);
        rows++;
        if (text.length < CHUNK) continue;
        await file.write(text);
        text = '';
      }
      await file.write(text);
      counts[table] = rows;
    } finally {
      await file.close();
    }
    await rename(`${path}.part`, path);
  }
  return counts;
}

/** Writes report.html: one page that needs no network. */
export async function writeReportFile(ports: Ports, campaign: Campaign, folder: string): Promise<void> {
  const path = join(folder, REPORT);
  await writeFile(`${path}.part`, writeReport(ports, campaign));
  await rename(`${path}.part`, path);
}

/** Writes run.json, last: where it stands, the tables beside it are complete. */
export async function writeRunRecord(folder: string, record: object): Promise<void> {
  const path = join(folder, RUN_RECORD);
  await writeFile(`${path}.part`, `${JSON.stringify(record, null, 2)}\n`);
  await rename(`${path}.part`, path);
}

export const REPORT = 'report.html';
export const RUN_RECORD = 'run.json';
export const PROGRAM = 'ratespan';
