import type { CampaignStatus } from '../../schema/wire/campaign.ts';
import { RESULT_TABLES } from '../../schema/wire/result-tables.ts';
import type { Ports } from '../ports/index.ts';
import { type Campaign, type ResultRow, readTable } from '../store/index.ts';
import { headlineTable, isHeadline } from './headline.ts';
import { REPORT, RUN_RECORD } from './result-files.ts';
import type { Terminal } from './terminal.ts';

interface RunReport {
  ports: Ports;
  campaign: Campaign;
  status: CampaignStatus;
  out: string;
  json: boolean;
  quiet: boolean;
}

/** The summary of a run on standard output: one line a sample, what was not reduced, flags and gaps by code, where the files are. */
export async function reportRun(
  { ports, campaign, status, out, json, quiet }: RunReport,
  terminal: Terminal,
): Promise<void> {
  if (quiet && !json) return;
  const headlines: ResultRow[] = [];
  for await (const row of readTable(ports, campaign.id, 'parameters')) if (isHeadline(row)) headlines.push(row);
  const flags = await countCodes(ports, campaign.id, 'flags');
  const gaps = await countCodes(ports, campaign.id, 'gaps');
  if (json) {
    const summary = { out, scans: status.scans, samples: status.samples, jobs: status.jobs, headlines, flags, gaps };
    terminal.out(`${JSON.stringify(summary, null, 2)}\n`);
    return;
  }
  terminal.out(`${headlineTable(status.samples, headlines)}\n`);
  terminal.out('E in kJ/mol; K/s: slowest to fastest scan used; no value where a method could not be used.\n');
  const states = Object.entries(status.scans).filter(([, n]) => n > 0);
  terminal.out(`scans: ${states.map(([state, n]) => `${n} ${state.replace('_', ' ')}`).join(', ')}\n`);
  for (const { sample, reason } of status.samples) if (reason) terminal.out(`${sample}: ${reason}\n`);
  for (const [name, codes] of Object.entries({ flags, gaps })) {
    const text = Object.entries(codes).map(([code, n]) => `${code}${n > 1 ? ` ×${n}` : ''}`);
    terminal.out(wrapList(`${name}: `, text.length ? text : ['none']));
  }
  if (status.jobs.failed > 0) terminal.out(`${status.jobs.failed} jobs failed; flags.csv and scans.csv say which\n`);
  terminal.out(
    `written to ${out}: ${[...Object.keys(RESULT_TABLES).map((t) => `${t}.csv`), REPORT, RUN_RECORD].join(' ')}\n`,
  );
}

async function countCodes(ports: Ports, campaignId: string, table: 'flags' | 'gaps'): Promise<Record<string, number>> {
  const counts: Record<string, number> = {};
  for await (const row of readTable(ports, campaignId, table)) {
    const code = String(row.code);
    counts[code] = (counts[code] ?? 0) + 1;
  }
  return counts;
}

/** A comma-separated list broken into lines of at most 100 characters. */
function wrapList(head: string, items: readonly string[]): string {
  let text = '';
  let line = head;
  for (const [i, item] of items.entries()) {
    const piece = i < items.length - 1 ? `${item}, ` : item;
    if (line.length + piece.trimEnd().length > 100) {
      text += `${line.trimEnd()}\n`;
      line = ' '.repeat(head.length);
    }
    line += piece;
  }
  return `${text}${line.trimEnd()}\n`;
}
