import { csvHeader, csvRow } from '../../../schema/wire/result-tables.ts';
import { findCampaign, listCampaigns, type ResultRow, readTable } from '../../store/index.ts';
import { wrongUsage } from '../arguments.ts';
import { exists } from '../campaign-folder.ts';
import { clientFromArguments } from '../client.ts';
import { storesFromEnvironment, storesOfFile, withPorts } from '../environment.ts';
import { EXIT, UsageError } from '../exit.ts';
import type { Terminal } from '../terminal.ts';

type Values = Record<string, string | boolean | undefined>;

/** `table CAMPAIGN`: the consolidated kinetic parameters on standard output. */
export async function table([name]: string[], values: Values, terminal: Terminal): Promise<number> {
  const { format = 'csv', db, to } = values;
  if (format !== 'csv' && format !== 'json') {
    throw wrongUsage('table', `--format takes csv or json, not ${JSON.stringify(format)}`);
  }
  if (db !== undefined && to !== undefined) throw wrongUsage('table', '--db and --to exclude each other');
  const print = (rows: AsyncIterable<ResultRow>) =>
    format === 'csv' ? printCsv(rows, terminal) : printJson(rows, terminal);
  const client = db === undefined ? clientFromArguments(values) : undefined;
  if (client) {
    await print(client.rows(name, 'parameters'));
    return EXIT.done;
  }
  if (db !== undefined && !(await exists(String(db)))) throw new UsageError(`there is no database file ${String(db)}`);
  const stores = db === undefined ? storesFromEnvironment() : storesOfFile(String(db));
  return withPorts({ ...stores, workers: 0 }, async (ports) => {
    const campaign = await findCampaign(ports, name);
    if (!campaign) {
      const known = (await listCampaigns(ports, { limit: 10 })).map((c) => JSON.stringify(c.name));
      throw new UsageError(
        `there is no campaign ${JSON.stringify(name)} in this database; it holds ${known.join(', ') || 'none'}`,
      );
    }
    await print(readTable(ports, campaign.id, 'parameters'));
    return EXIT.done;
  });
}

async function printCsv(rows: AsyncIterable<ResultRow>, terminal: Terminal): Promise<void> {
  let text = csvHeader('parameters');
  for await (const row of rows) text += csvRow('parameters', row);
  terminal.out(text);
}

async function printJson(rows: AsyncIterable<ResultRow>, terminal: Terminal): Promise<void> {
  const items: ResultRow[] = [];
  for await (const row of rows) items.push(row);
  terminal.out(`${JSON.stringify(items, null, 2)}\n`);
}
