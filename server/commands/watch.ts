import { type ChildProcess, fork, spawn } from 'node:child_process';
import { readFile } from 'node:fs/promises';
import { hostname } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { parseArgs } from 'node:util';
import { Settings } from '../../shared-types/settings.ts';
import type { NewWatchToSend } from '../../shared-types/watch.ts';
import { createAccess } from '../gateway/access/access.ts';
import { inUrl, isLoopback } from '../gateway/access/hostCheck.ts';
import { complaint } from '../gateway/complaint.ts';
import { openReceivers } from '../gateway/delivery/receivers.ts';
import type { Tls } from '../gateway/http/httpServer.ts';
import type { Log } from '../gateway/logLines.ts';
import { type RunningServer, startServer } from '../gateway/server.ts';
import { modelFromJson } from '../model/modelFile.ts';
import { InputError } from '../signal/inputError.ts';
import { createStoreThread } from '../store/storeThread.ts';
import { createWatch } from '../watch/watch.ts';
import { runCommand, wholeOption } from './options.ts';
import { programName } from './program.ts';
import { asksForTokens, logChoice, tlsChoice, unixSeconds } from './watchOptions.ts';

const HELP = `foreshift watch [options]

Serves the pages, takes in live channels, records them and warns.

  --port N          port of the pages and of ingest (default: 4717, or FORESHIFT_PORT)
  --listen ADDRESS  127.0.0.1 (default): only this machine can connect, and may do everything. Any other address of
                    this machine, or 0.0.0.0 for all: others can connect, each with a token (foreshift token --help)
  --certificate FILE --key FILE   PEM: pages by https, producers by wss
  --name HOST       a name this server is reached by, beside this machine's own; may be given again
  --tokens          ask for tokens also where only this machine can connect (behind a proxy, say)
  --data DIR        what is recorded (default: ./foreshift-data, or FORESHIFT_DATA)
  --model MODEL.json --channel NAME   watch this channel with this model; --channel again for a model of several
  --demo            an invented stand with two water loops, and a watch on each
  --no-browser      do not open the page
  --log FORM        sentences (default): warnings and errors; json: all that happens, one JSON object a line
  --log-to FILE     where the log is added to (default: standard error)

example: foreshift watch --model loop.json --channel "loop 1, dT"
`;

const OPTIONS = {
  port: { type: 'string' },
  listen: { type: 'string' },
  data: { type: 'string' },
  model: { type: 'string' },
  channel: { type: 'string', multiple: true },
  demo: { type: 'boolean' },
  'no-browser': { type: 'boolean' },
  certificate: { type: 'string' },
  key: { type: 'string' },
  name: { type: 'string', multiple: true },
  tokens: { type: 'boolean' },
  log: { type: 'string' },
  'log-to': { type: 'string' },
  help: { type: 'boolean', short: 'h' },
} as const;

interface Choice {
  port: number;
  listen: string;
  data: string;
  model: { json: string; channels: string[] } | null;
  demo: boolean;
  browser: boolean;
  /** whether others than this machine's own are asked for a token */
  tokens: boolean;
  tls: Tls | null;
  names: string[];
  log: Log;
}

async function modelChoice(
  file: string | undefined,
  channels: string[] | undefined,
): Promise<Choice['model']> {
  if (file === undefined && channels === undefined) return null;
  if (file === undefined || channels === undefined)
    throw new InputError(
      'MODEL_AND_CHANNEL',
      `--${file ? 'model' : 'channel'} is given alone; a watch needs both, --model MODEL.json --channel NAME`,
    );
  const json = await readFile(file, 'utf8').catch((error: NodeJS.ErrnoException) => {
    throw new InputError(
      'NO_MODEL',
      `the model file ${file} cannot be read (${error.code}); name one that fit wrote`,
    );
  });
  return { json, channels };
}

async function choose(argv: string[]): Promise<Choice | null> {
  const { values } = parseArgs({ args: argv, options: OPTIONS });
  if (values.help) return null;
  const port = wholeOption({ port: values.port ?? process.env.FORESHIFT_PORT }, 'port', 0) ?? 4717;
  if (port > 65535)
    throw new InputError('BAD_OPTION', `--port is ${port}, expected 0 to 65535; write --port 4717`);
  const listen = values.listen ?? '127.0.0.1';
  const data = values.data ?? process.env.FORESHIFT_DATA ?? './foreshift-data';
  return {
    port,
    listen,
    data,
    model: await modelChoice(values.model, values.channel),
    demo: values.demo === true,
    browser: values['no-browser'] !== true,
    tokens: asksForTokens(listen, values.tokens === true, data),
    tls: await tlsChoice(values.certificate, values.key),
    names: values.name ?? [],
    log: await logChoice(values.log, values['log-to']),
  };
}

async function readSettings(data: string): Promise<Settings> {
  const file = join(data, 'settings.json');
  let text: string;
  try {
    text = await readFile(file, 'utf8');
  } catch {
    return Settings.parse({});
  }
  try {
    const parsed = Settings.safeParse(JSON.parse(text));
    if (parsed.success) return parsed.data;
    throw new InputError(
      'BAD_SETTINGS',
      `${file} cannot be used: ${complaint(parsed.error)}; correct it or take the key out`,
    );
  } catch (error) {
    if (error instanceof InputError) throw error;
    throw new InputError('BAD_SETTINGS', `${file} is not JSON: ${(error as Error).message}; correct it`);
  }
}

function openBrowser(address: string): void {
  const [command, ...before] = { darwin: ['open'], win32: ['cmd', '/c', 'start', ''] }[
    process.platform as string
  ] ?? ['xdg-open'];
  const opening = spawn(command!, [...before, address], { stdio: 'ignore', detached: true });
  // Without a browser the address on the terminal does as well.
  opening.on('error', () => {});
  opening.unref();
}

/** Time of the newest sample of any channel, Unix seconds; 0 when there is none. */
const newestStored = ({ hub: { channels } }: RunningServer): number =>
  Math.max(0, ...channels.names().map((channel) => channels.newest(channel) ?? 0));

function startStand(server: RunningServer, lock: string): ChildProcess {
  const file = import.meta.url.endsWith('.js') ? './standRig.js' : './standRig.ts';
  return fork(
    fileURLToPath(new URL(file, import.meta.url)),
    ['--to', server.ownIngest, '--after', String(newestStored(server)), '--lock', lock],
    {
      env: { ...process.env, ...(server.ownToken === null ? {} : { FORESHIFT_TOKEN: server.ownToken }) },
      stdio: ['ignore', 'ignore', 'inherit', 'ipc'],
    },
  );
}

/** Starts a watch, unless the same model is already watching the same channels. */
async function startWatch(
  server: RunningServer,
  json: string,
  asked: Omit<NewWatchToSend, 'model'>,
): Promise<void> {
  const { watches } = server.hub;
  const model = await watches.addModel(json);
  const wanted = asked.channels.join('\n');
  const running = watches
    .states()
    .some(
      (state) =>
        state.model === model && state.channels.join('\n') === wanted && state.use !== 'taken out of use',
    );
  if (!running) await watches.add({ ...asked, model });
}

/** The demo's models, past and watches, made at the first start. */
async function startDemo(server: RunningServer, data: string, ingest: string): Promise<void> {
  const { prepareDemo } = await import('./prepareDemo.ts');
  const { sendDemoPast } = await import('./demoPast.ts');
  const { models, watches, recordings } = await prepareDemo(data);
  const unknown = recordings.filter((_, k) => !server.hub.channels.has(watches[k]!.channels[0]!));
  await sendDemoPast(ingest, unknown, Date.now() / 1000, server.ownToken);
  for (const wanted of watches) {
    const model = models.find(({ name }) => name === wanted.model)!;
    await startWatch(server, model.json, wanted);
  }
}

/** Where a person finds the page, and a producer its ingest. */
function addressesOf({ listen, names, tls }: Choice, port: number): { page: string; ingest: string } {
  const everywhere = listen === '0.0.0.0' || listen === '::';
  const host = inUrl(names[0] ?? (everywhere ? hostname() : listen));
  const secure = tls === null ? '' : 's';
  return { page: `http${secure}://${host}:${port}/`, ingest: `ws${secure}://${host}:${port}/ingest` };
}

function sayWhere(page: string, ingest: string, choice: Choice): void {
  process.stdout.write(
    `${programName()}\n` +
      `  page       ${page}\n` +
      `  producers  ${ingest}\n` +
      `  data       ${choice.data}\n` +
      (choice.tokens ? '  tokens     asked for; foreshift token creates and withdraws them\n' : '') +
      'An aid to attention, not a safety function: local codes and licensed practice govern protection.\n' +
      'Ctrl-C stops it.\n',
  );
}

function warnOfPlainText(log: Log): void {
  log({
    level: 'warning',
    event: 'not encrypted',
    text: 'tokens and data cross the network unencrypted: whoever can listen there can use them; add --certificate FILE --key FILE, or let a proxy on this machine speak TLS',
  });
}

function untilStopped(): Promise<void> {
  return new Promise((resolve) => {
    process.once('SIGINT', () => resolve());
    process.once('SIGTERM', () => resolve());
  });
}

async function start(choice: Choice): Promise<RunningServer> {
  // A model that cannot be used is told before anything is started.
  if (choice.model) modelFromJson(choice.model.json);
  const settings = await readSettings(choice.data);
  const receivers = await openReceivers(settings.receivers, choice.data, process.env, unixSeconds);
  const store = await createStoreThread(choice.data, { commitEvery: settings.commitEvery });
  const warn = (text: string) => choice.log({ level: 'warning', event: 'trouble', text });
  try {
    return await startServer({
      port: choice.port,
      listen: choice.listen,
      store,
      settings,
      receivers,
      demo: choice.demo,
      program: programName(),
      createWatch,
      readModel: modelFromJson,
      warn,
      log: choice.log,
      names: choice.names,
      ...(choice.tls === null ? {} : { tls: choice.tls }),
      ...(choice.tokens
        ? {
            access: createAccess({
              folder: choice.data,
              now: unixSeconds,
              secure: choice.tls !== null,
              warn,
            }),
          }
        : {}),
      player: {
        program: [process.execPath, fileURLToPath(new URL('./main.js', import.meta.url))],
        data: choice.data,
      },
    });
  } catch (error) {
    const { code } = error as NodeJS.ErrnoException;
    if (code === 'EADDRNOTAVAIL' || code === 'ENOTFOUND')
      throw new InputError(
        'BAD_ADDRESS',
        `--listen is ${choice.listen}, which is no address of this machine; write one it has, or 0.0.0.0 for all`,
      );
    if (code !== 'EADDRINUSE') throw error;
    throw new InputError(
      'PORT_IN_USE',
      `port ${choice.port} is taken by another program; stop it, or choose another with --port ${choice.port + 1}`,
    );
  }
}

async function run(argv: string[]): Promise<number> {
  const choice = await choose(argv);
  if (!choice) {
    process.stdout.write(HELP);
    return 0;
  }
  const server = await start(choice);
  let stand: ChildProcess | null = null;
  try {
    if (choice.model) await startWatch(server, choice.model.json, { channels: choice.model.channels });
    const { page, ingest } = addressesOf(choice, server.port);
    if (!isLoopback(choice.listen) && choice.tls === null) warnOfPlainText(choice.log);
    if (choice.demo) await startDemo(server, choice.data, server.ownIngest);
    const stopped = untilStopped();
    if (choice.demo) stand = startStand(server, join(choice.data, 'demo', 'rig.lock'));
    sayWhere(page, ingest, choice);
    if (choice.browser) openBrowser(page);
    await stopped;
  } finally {
    stand?.kill('SIGTERM');
    await server.close();
  }
  return 0;
}

/** `foreshift watch`: the server, until it is told to stop. */
export function watch(argv: string[]): Promise<number> {
  return runCommand('watch', () => run(argv));
}
