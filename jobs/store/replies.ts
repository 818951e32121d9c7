import { and, eq } from 'drizzle-orm';
import { replies } from '../../schema/tables/index.ts';
import type { Ports } from '../ports/index.ts';
import { allRows, runBatch, text } from './statement.ts';

/** An answer that is given again when the same request comes again. */
export interface KeptReply {
  status: number;
  contentType: string | null;
  location: string | null;
  body: string;
}

/** How long answers are kept. */
export const REPLY_LIFE_MS = 86_400_000;
/** A request that is still unanswered after this long has died with its process: the next one takes its place. */
const ANSWER_TIME_MS = 60_000;

export type ReplyClaim = { state: 'ours' | 'running' | 'other-request' } | { state: 'kept'; reply: KeptReply };

/** Claims a key for one request, or says what stands under it. @param request hash of the request */
export async function claimReply(ports: Ports, lab: string, key: string, request: string): Promise<ReplyClaim> {
  const now = ports.clock.now();
  const taken = await ports.database.write((db) =>
    allRows<{ key: string }>(
      db,
      text`
        insert into replies (lab, key, request, created_at) values (${lab}, ${key}, ${request}, ${now})
        on conflict (lab, key) do update set request = excluded.request, created_at = excluded.created_at,
          status = null, content_type = null, location = null, body = null
        where replies.created_at < ${now - REPLY_LIFE_MS}
          or (replies.status is null and replies.created_at < ${now - ANSWER_TIME_MS})
        returning key`,
    ),
  );
  if (taken.length > 0) return { state: 'ours' };
  const [row] = await ports.database.read
    .select()
    .from(replies)
    .where(and(eq(replies.lab, lab), eq(replies.key, key)));
  if (!row || row.request !== request) return { state: row ? 'other-request' : 'running' };
  if (row.status === null) return { state: 'running' };
  const { status, contentType, location, body } = row;
  return { state: 'kept', reply: { status, contentType, location, body: body ?? '' } };
}

export async function keepReply(ports: Ports, lab: string, key: string, reply: KeptReply): Promise<void> {
  await ports.database.write((db) =>
    runBatch(db, [
      text`
        update replies set status = ${reply.status}, content_type = ${reply.contentType}, location = ${reply.location}, body = ${reply.body}
        where lab = ${lab} and key = ${key}`,
    ]),
  );
}

/** The request came to nothing that should be repeated: the key is free again. */
export async function dropReply(ports: Ports, lab: string, key: string): Promise<void> {
  await ports.database.write((db) => runBatch(db, [text`delete from replies where lab = ${lab} and key = ${key}`]));
}

/** Forgets answers whose day is over. */
export async function sweepReplies(ports: Ports): Promise<void> {
  const before = ports.clock.now() - REPLY_LIFE_MS;
  await ports.database.write((db) => runBatch(db, [text`delete from replies where created_at < ${before}`]));
}
