import { type Client, createClient, type InStatement } from '@libsql/client/web';
import { drizzle } from 'drizzle-orm/libsql/web';
import type { Database } from '../ports/index.ts';

/** A remote libSQL database over HTTP: each statement or batch is one request and the server keeps writers in turn. */
export function openRemoteDatabase(url: string, authToken?: string): Database {
  const client = createClient({ url, authToken });
  const db = drizzle(withWriteBatches(client));
  return {
    read: db,
    write: (work) => work(db),
    close: () => client.close(),
  };
}

/** See libsql-node: a deferred batch can fail half way when another client writes first. */
function withWriteBatches(client: Client): Client {
  return new Proxy(client, {
    get(target, name) {
      if (name === 'batch') return (statements: InStatement[]) => target.batch(statements, 'write');
      const value = Reflect.get(target, name, target);
      return typeof value === 'function' ? value.bind(target) : value;
    },
  });
}
