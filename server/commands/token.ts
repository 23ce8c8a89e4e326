import { existsSync } from 'node:fs';
import { parseArgs } from 'node:util';
import type { Role } from '../../shared-types/access.ts';
import { createToken, readTokens, type TokenRecord, withdrawToken } from '../gateway/access/accessTokens.ts';
import { InputError } from '../signal/inputError.ts';
import { dataFolder } from './backup.ts';
import { printJson, runCommand } from './options.ts';

const HELP = `foreshift token create NAME --role ROLE [--channel CHANNEL ...] [options]
foreshift token list [options]
foreshift token withdraw NAME [options]

Tokens say who may do what on a server that other machines can reach (foreshift watch --listen). A running server
follows at once. A token is shown when it is created and never again: only its hash is kept, in access.json of the
data folder.

  --role ROLE      operator: everything on the pages   viewer: look   producer: feed channels, and nothing else
  --channel NAME   for a producer: it may feed this channel only; may be given again (default: any channel)
  --data DIR       the server's data folder (default: ./foreshift-data, or FORESHIFT_DATA)
  --json           one JSON document

A page asks for the token once. A producer sends it as "Authorization: Bearer TOKEN" when it connects; foreshift play
takes it from the environment, FORESHIFT_TOKEN.

example: foreshift token create "rig 2" --role producer --channel "loop 1, dT"
`;

const OPTIONS = {
  role: { type: 'string' },
  channel: { type: 'string', multiple: true },
  data: { type: 'string' },
  json: { type: 'boolean' },
  help: { type: 'boolean', short: 'h' },
} as const;

const ROLES: readonly string[] = ['operator', 'viewer', 'producer'] satisfies Role[];

type Values = ReturnType<typeof parse>['values'];
const parse = (args: string[]) => parseArgs({ args, options: OPTIONS, allowPositionals: true });

function roleOf(role: string | undefined): Role {
  if (role !== undefined && ROLES.includes(role)) return role as Role;
  throw new InputError(
    'BAD_ROLE',
    `${role === undefined ? 'there is no --role' : `--role is "${role}"`}, expected operator, viewer or producer; write for example --role viewer`,
  );
}

function nameOf(names: string[], action: string): string {
  if (names.length === 1) return names[0]!;
  throw new InputError(
    'ONE_NAME',
    `${names.length === 0 ? 'no name' : `${names.length} names`} given, expected one; write foreshift token ${action} "control room"`,
  );
}

/** What an action says, as a document and in words. */
interface Answer {
  json: object;
  text: string;
}

function create(folder: string, name: string, values: Values): Answer {
  const role = roleOf(values.role);
  const channels = values.channel ?? null;
  const token = createToken(folder, { name, role, channels }, new Date());
  const bound = channels === null ? '' : `, for ${channels.map((channel) => `"${channel}"`).join(', ')}`;
  return {
    json: { name, role, channels, token },
    text: `${token}\nThis is the ${role} token "${name}"${bound}. Keep it now: it is not shown again.\n`,
  };
}

const line = ({ name, role, channels, createdAt }: TokenRecord): string =>
  `${role.padEnd(8)}  ${createdAt.slice(0, 10)}  ${name}${channels === null ? '' : `  (${channels.join('; ')})`}\n`;

function list(folder: string): Answer {
  if (!existsSync(folder))
    throw new InputError('NO_DATA', `there is no folder ${folder}; name the server's with --data DIR`);
  const kept = readTokens(folder);
  const tokens = kept.map(({ sha256: _, ...shown }) => shown);
  return {
    json: { tokens },
    text:
      tokens.length === 0
        ? `There is no token in ${folder}: only this machine can use its server.\n`
        : kept.map(line).join(''),
  };
}

function withdraw(folder: string, name: string): Answer {
  withdrawToken(folder, name);
  return {
    json: { withdrawn: name },
    text: `The token "${name}" is withdrawn; whoever was in by it is out.\n`,
  };
}

function answer(action: string | undefined, names: string[], folder: string, values: Values): Answer {
  if (action === 'create') return create(folder, nameOf(names, action), values);
  if (action === 'withdraw') return withdraw(folder, nameOf(names, action));
  if (action === 'list') return list(folder);
  throw new InputError(
    'NO_ACTION',
    `${action === undefined ? 'nothing' : `"${action}"`} is asked for, expected create, list or withdraw; see foreshift token --help`,
  );
}

async function run(argv: string[]): Promise<number> {
  const { values, positionals } = parse(argv);
  if (values.help) {
    process.stdout.write(HELP);
    return 0;
  }
  const [action, ...names] = positionals;
  const { json, text } = answer(action, names, dataFolder(values.data), values);
  if (values.json) printJson(json);
  else process.stdout.write(text);
  return 0;
}

/** `foreshift token`: creates, lists and withdraws what lets people and producers in. */
export function token(argv: string[]): Promise<number> {
  return runCommand('token', () => run(argv));
}
