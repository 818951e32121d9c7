import type { Ports } from '../ports/index.ts';
import { allRows, text } from './statement.ts';

/** A blob that no row names may still be on its way to one; after this long it is not. */
export const ORPHAN_AGE_MS = 86_400_000;
/** Blobs looked up in one statement. */
const CHUNK = 200;

/**
 * Deletes blobs older than a day that no row names: what a crash between blob and row left, what a deleted campaign left,
 * and derived blobs of inputs that have changed since. Returns how many.
 */
export async function sweepOrphanBlobs(ports: Ports): Promise<number> {
  const before = ports.clock.now() - ORPHAN_AGE_MS;
  let swept = 0;
  let chunk: string[] = [];
  const sweepChunk = async () => {
    if (chunk.length === 0) return;
    const named = await namedKeys(ports, chunk);
    for (const key of chunk.filter((k) => !named.has(k))) {
      await ports.blobs.delete(key);
      swept++;
    }
    chunk = [];
  };
  for (const prefix of ['originals/', 'derived/']) {
    for await (const { key, modifiedMs } of ports.blobs.list(prefix)) {
      if (modifiedMs >= before) continue;
      chunk.push(key);
      if (chunk.length >= CHUNK) await sweepChunk();
    }
  }
  await sweepChunk();
  return swept;
}

/** Derived keys end in the hash of what they were made from, some with a number after it. */
const nameOf = (key: string): string => /[0-9a-f]{64}/.exec(key)?.[0] ?? key;

/** Which of these keys some row of their campaign names: an original by its key, a derived blob by its hash. */
async function namedKeys(ports: Ports, keys: readonly string[]): Promise<Set<string>> {
  const byCampaign = new Map<string, string[]>();
  for (const key of keys) byCampaign.set(key.split('/')[1], [...(byCampaign.get(key.split('/')[1]) ?? []), key]);
  const named = new Set<string>();
  for (const [id, own] of byCampaign) {
    const rows = await allRows<{ name: string }>(
      ports.database.read,
      text`
        select name from (
          select blob_key as name from files where campaign_id = ${id}
          union all select substr(reduced_key, -64) from scans where campaign_id = ${id}
          union all select fit_key from samples where campaign_id = ${id}
          union all select judge_key from samples where campaign_id = ${id}
          union all select forecast_key from samples where campaign_id = ${id})
        where name in (select value from json_each(${JSON.stringify(own.map(nameOf))}))`,
    );
    const names = new Set(rows.map((row) => row.name));
    for (const key of own) if (names.has(nameOf(key))) named.add(key);
  }
  return named;
}
