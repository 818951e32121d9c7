import { and, asc, eq, gt, or } from 'drizzle-orm';
import { campaigns } from '../../schema/tables/index.ts';
import type { Ports } from '../ports/index.ts';
import { isConstraint } from './fence.ts';
import { createId } from './ids.ts';
import { StoreRefusal } from './refusals.ts';

export const LOCAL_LAB = 'local';
export const CAMPAIGN_NAME_LIMIT = 80;

export interface Campaign {
  id: string;
  lab: string;
  name: string;
  /** ms since the epoch */
  createdAt: number;
  /** Grows with every change of anything the campaign shows. */
  revision: number;
}

export interface Page {
  /** Id after which to go on; rows are ordered by id. */
  after?: string;
  limit?: number;
}

const COLUMNS = {
  id: campaigns.id,
  lab: campaigns.lab,
  name: campaigns.name,
  createdAt: campaigns.createdAt,
  revision: campaigns.revision,
};

function checkName(name: string): void {
  const length = [...name].length;
  // biome-ignore lint/suspicious/noControlCharactersInRegex: control characters are what is being refused
  if (length < 1 || length > CAMPAIGN_NAME_LIMIT || name.trim() !== name || /[\u0000-\u001f\u007f]/.test(name)) {
    throw new StoreRefusal(
      'name-invalid',
      `a campaign name has 1 to ${CAMPAIGN_NAME_LIMIT} characters, none of them a control character, and no space at its ends; got ${JSON.stringify(name)}`,
    );
  }
}

const nameTaken = (name: string) =>
  new StoreRefusal('name-taken', `a campaign named ${JSON.stringify(name)} exists already; choose another name`);

/** Throws StoreRefusal `name-invalid` or `name-taken`. */
export async function createCampaign(ports: Ports, name: string, lab = LOCAL_LAB): Promise<Campaign> {
  checkName(name);
  const row: Campaign = { id: createId('campaign'), lab, name, createdAt: ports.clock.now(), revision: 0 };
  try {
    await ports.database.write((db) => db.insert(campaigns).values(row));
  } catch (error) {
    if (isConstraint(error)) throw nameTaken(name);
    throw error;
  }
  return row;
}

export function listCampaigns(
  ports: Ports,
  { lab = LOCAL_LAB, after, limit }: Page & { lab?: string } = {},
): Promise<Campaign[]> {
  const query = ports.database.read
    .select(COLUMNS)
    .from(campaigns)
    .where(and(eq(campaigns.lab, lab), after === undefined ? undefined : gt(campaigns.id, after)))
    .orderBy(asc(campaigns.id))
    .$dynamic();
  return limit === undefined ? query.all() : query.limit(limit).all();
}

/** By id or, failing that, by name within the lab. */
export async function findCampaign(ports: Ports, idOrName: string, lab = LOCAL_LAB): Promise<Campaign | undefined> {
  const found = await ports.database.read
    .select(COLUMNS)
    .from(campaigns)
    .where(and(eq(campaigns.lab, lab), or(eq(campaigns.id, idOrName), eq(campaigns.name, idOrName))));
  return found.find((c) => c.id === idOrName) ?? found[0];
}

/** Throws StoreRefusal `campaign-unknown`, `name-invalid` or `name-taken`. */
export async function renameCampaign(ports: Ports, campaignId: string, name: string): Promise<Campaign> {
  checkName(name);
  const rename = (db: Ports['database']['read']) =>
    db.update(campaigns).set({ name }).where(eq(campaigns.id, campaignId)).returning(COLUMNS);
  try {
    const [row] = await ports.database.write(rename);
    if (!row) throw new StoreRefusal('campaign-unknown', `there is no campaign ${campaignId}`);
    return row;
  } catch (error) {
    if (isConstraint(error)) throw nameTaken(name);
    throw error;
  }
}

/** Removes the campaign with everything in it, rows first; blobs that a crash leaves behind are named by no row and swept later. */
export async function deleteCampaign(ports: Ports, campaignId: string): Promise<void> {
  await ports.database.write((db) => db.delete(campaigns).where(eq(campaigns.id, campaignId)));
  for (const prefix of [`originals/${campaignId}/`, `derived/${campaignId}/`]) {
    for await (const { key } of ports.blobs.list(prefix)) await ports.blobs.delete(key);
  }
}
