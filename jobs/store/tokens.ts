import { createHash, timingSafeEqual } from 'node:crypto';
import { and, asc, eq, gt, isNull } from 'drizzle-orm';
import { tokens } from '../../schema/tables/index.ts';
import { TOKEN_ROLES, type TokenRole } from '../../schema/wire/states.ts';
import type { Ports } from '../ports/index.ts';
import { createId } from './ids.ts';
import { StoreRefusal } from './refusals.ts';

/** Whom a token speaks for. */
export interface TokenOwner {
  id: string;
  lab: string;
  role: TokenRole;
}

export interface TokenView extends TokenOwner {
  /** ms since the epoch */
  createdAt: number;
  expiresAt: number;
  revokedAt: number | null;
}

const SECRET_BYTES = 32;
const DAY_MS = 86_400_000;
export const LONGEST_TOKEN_DAYS = 3650;
const LAB_NAME = /^[a-z0-9][a-z0-9-]{0,39}$/;

/** SHA-256 is enough: a secret of 256 random bits cannot be guessed, however fast a guess is. */
const digest = (secret: string): Buffer => createHash('sha256').update(secret).digest();

/**
 * Makes a token `ID.SECRET`. The secret leaves this function once and is stored nowhere.
 * Throws StoreRefusal `token-invalid`.
 */
export async function createToken(
  ports: Ports,
  { lab, role, days }: { lab: string; role: TokenRole; days: number },
): Promise<TokenView & { token: string }> {
  if (!LAB_NAME.test(lab))
    throw new StoreRefusal(
      'token-invalid',
      `a lab name has 1 to 40 of a-z, 0-9 and -, not first; got ${JSON.stringify(lab)}`,
    );
  if (!TOKEN_ROLES.includes(role))
    throw new StoreRefusal('token-invalid', `a role is one of ${TOKEN_ROLES.join(', ')}; got ${JSON.stringify(role)}`);
  if (!Number.isInteger(days) || days < 1 || days > LONGEST_TOKEN_DAYS)
    throw new StoreRefusal('token-invalid', `a token lives 1 to ${LONGEST_TOKEN_DAYS} whole days; got ${days}`);
  const secret = Buffer.from(crypto.getRandomValues(new Uint8Array(SECRET_BYTES))).toString('base64url');
  const now = ports.clock.now();
  const row = { id: createId('token'), lab, role, createdAt: now, expiresAt: now + days * DAY_MS, revokedAt: null };
  const hash = digest(secret).toString('hex');
  await ports.database.write((db) => db.insert(tokens).values({ ...row, hash }));
  return { ...row, token: `${row.id}.${secret}` };
}

const VIEW = {
  id: tokens.id,
  lab: tokens.lab,
  role: tokens.role,
  createdAt: tokens.createdAt,
  expiresAt: tokens.expiresAt,
  revokedAt: tokens.revokedAt,
};

export const listTokens = (ports: Ports): Promise<TokenView[]> =>
  ports.database.read.select(VIEW).from(tokens).orderBy(asc(tokens.createdAt), asc(tokens.id)).all();

/** Throws StoreRefusal `token-unknown`. Revoking twice keeps the first time. */
export async function revokeToken(ports: Ports, id: string): Promise<TokenView> {
  await ports.database.write((db) =>
    db
      .update(tokens)
      .set({ revokedAt: ports.clock.now() })
      .where(and(eq(tokens.id, id), isNull(tokens.revokedAt))),
  );
  const [row] = await ports.database.read.select(VIEW).from(tokens).where(eq(tokens.id, id));
  if (!row) throw new StoreRefusal('token-unknown', `there is no token ${JSON.stringify(id)}; see: token list`);
  return row;
}

/** Whether anybody could log in. */
export async function hasLiveToken(ports: Ports): Promise<boolean> {
  const live = and(isNull(tokens.revokedAt), gt(tokens.expiresAt, ports.clock.now()));
  return (await ports.database.read.select({ id: tokens.id }).from(tokens).where(live).limit(1)).length > 0;
}

const NOBODY = digest('');

/** The owner of a token that counts now, else undefined. The secret's hash is compared in constant time, also where the id is unknown. */
export async function findTokenOwner(ports: Ports, token: string): Promise<TokenOwner | undefined> {
  const [, id, secret] = /^(t_[0-9a-f]{24})\.([\w-]{43})$/.exec(token) ?? [];
  if (!id) return undefined;
  const [row] = await ports.database.read.select().from(tokens).where(eq(tokens.id, id));
  const equal = timingSafeEqual(row ? Buffer.from(row.hash, 'hex') : NOBODY, digest(secret));
  if (!row || !equal || row.revokedAt !== null || row.expiresAt <= ports.clock.now()) return undefined;
  return { id: row.id, lab: row.lab, role: row.role };
}
