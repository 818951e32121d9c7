import { TOKEN_ROLES, type TokenRole } from '../../../schema/wire/states.ts';
import type { Ports } from '../../ports/index.ts';
import {
  createToken,
  LONGEST_TOKEN_DAYS,
  listTokens,
  revokeToken,
  StoreRefusal,
  type TokenView,
} from '../../store/index.ts';
import { wholeNumber, wrongUsage } from '../arguments.ts';
import { storesFromEnvironment, withPorts } from '../environment.ts';
import { EXIT, UsageError } from '../exit.ts';
import type { Terminal } from '../terminal.ts';
import { textTable } from '../text-table.ts';

type Values = Record<string, string | boolean | undefined>;

const DEFAULT_DAYS = 365;

/** `token add | list | revoke ID`: access tokens, in the database itself and never over the network. */
export async function token([action, id]: string[], values: Values, terminal: Terminal): Promise<number> {
  const actions: Record<string, (ports: Ports) => Promise<void>> = {
    add: (ports) => add(ports, values, terminal),
    list: (ports) => list(ports, terminal),
    revoke: (ports) => revoke(ports, id, terminal),
  };
  if (!Object.hasOwn(actions, action))
    throw wrongUsage('token', `add, list or revoke ID is wanted, not ${JSON.stringify(action)}`);
  if ((id !== undefined) !== (action === 'revoke'))
    throw wrongUsage(
      'token',
      action === 'revoke' ? 'revoke needs the ID that token list shows' : `${action} takes no ID`,
    );
  await withPorts({ ...storesFromEnvironment(), workers: 0 }, async (ports) => {
    await actions[action](ports).catch((error) => {
      throw error instanceof StoreRefusal ? new UsageError(error.message) : error;
    });
  });
  return EXIT.done;
}

async function add(ports: Ports, values: Values, terminal: Terminal): Promise<void> {
  const { lab, role } = values;
  if (lab === undefined || role === undefined)
    throw wrongUsage('token', `add needs --lab LAB and --role ${TOKEN_ROLES.join('|')}`);
  const days = wholeNumber('token', 'days', values.days, [1, LONGEST_TOKEN_DAYS]) ?? DEFAULT_DAYS;
  const made = await createToken(ports, { lab: String(lab), role: role as TokenRole, days });
  // The token alone on standard output, so that it can be piped to where it is kept.
  terminal.out(`${made.token}\n`);
  terminal.note(
    `token ${made.id} for lab ${made.lab}, ${made.role}, until ${dateOf(made.expiresAt)}; it is shown this once`,
  );
}

const dateOf = (ms: number): string => new Date(ms).toISOString().slice(0, 10);

const stateOf = (row: TokenView, now: number): string =>
  row.revokedAt !== null ? `revoked ${dateOf(row.revokedAt)}` : row.expiresAt <= now ? 'expired' : 'live';

async function list(ports: Ports, terminal: Terminal): Promise<void> {
  const rows = await listTokens(ports);
  const cells = rows.map((row) => [
    row.id,
    row.lab,
    row.role,
    dateOf(row.createdAt),
    dateOf(row.expiresAt),
    stateOf(row, ports.clock.now()),
  ]);
  terminal.out(
    rows.length === 0
      ? 'no token\n'
      : textTable(
          ['id', 'lab', 'role', 'made', 'until', 'state'].map((title) => ({ title })),
          cells,
        ),
  );
}

async function revoke(ports: Ports, id: string, terminal: Terminal): Promise<void> {
  const row = await revokeToken(ports, id);
  terminal.note(`token ${row.id} of lab ${row.lab} no longer counts`);
}
