/** Child process of the database contract: writes `count` campaigns into a file that another process writes into. */
import { openFileDatabase } from '../../jobs/adapters/libsql-node.ts';
import { campaigns } from '../../schema/tables/index.ts';

const [file, prefix, count] = process.argv.slice(2);

async function main(): Promise<void> {
  const database = await openFileDatabase(file);
  process.send?.('ready');
  for (let i = 0; i < Number(count); i++) {
    const name = `${prefix} ${i}`;
    await database.write((db) => db.insert(campaigns).values({ id: name, lab: 'local', name, createdAt: 1 }));
  }
  database.close();
}

void main().then(() => process.disconnect());
