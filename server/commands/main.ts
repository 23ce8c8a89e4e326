#!/usr/bin/env node
import { pathToFileURL } from 'node:url';
import { programName } from './program.ts';

const HELP = `${programName()}: warns before an intermittently switching experiment changes its regime

  foreshift watch       serve the pages, take in live channels, warn
  foreshift fit         fit a model to recordings
  foreshift rehearse    run a watch over recordings as if live, and score it
  foreshift play        send a recording as a live stream
  foreshift backup      copy all that is recorded into one file
  foreshift restore     put such a file into an empty folder
  foreshift token       say who may do what on a server that other machines can reach

foreshift COMMAND --help tells more of each, with an example. To see it work: foreshift watch --demo
An aid to attention, not a safety function: no interlock, no trip, no protection layer.
`;

type Command = (argv: string[]) => Promise<number>;

const COMMANDS: Record<string, () => Promise<Command>> = {
  watch: async () => (await import('./watch.ts')).watch,
  fit: async () => (await import('./fit.ts')).fit,
  rehearse: async () => (await import('./rehearse.ts')).rehearse,
  play: async () => (await import('./play.ts')).play,
  backup: async () => (await import('./backup.ts')).backup,
  restore: async () => (await import('./restore.ts')).restore,
  token: async () => (await import('./token.ts')).token,
};

/**
 * Picks the command and runs it.
 *
 * @param argv what follows the program's name
 * @returns exit code: 0, 1 for a failure, 2 for bad input
 */
export async function main(argv: string[]): Promise<number> {
  const [name, ...rest] = argv;
  if (name === '--version' || name === '-v') {
    process.stdout.write(`${programName()}\n`);
    return 0;
  }
  if (name === undefined || name === '--help' || name === '-h' || name === 'help') {
    process.stdout.write(HELP);
    return 0;
  }
  const load = Object.hasOwn(COMMANDS, name) ? COMMANDS[name] : undefined;
  if (!load) {
    process.stderr.write(
      `foreshift: there is no command "${name}", expected one of ${Object.keys(COMMANDS).join(', ')}; see foreshift --help\n`,
    );
    return 2;
  }
  const command = await load();
  return command(rest);
}

// whoever reads the output may stop early: `foreshift rehearse … | head`
process.stdout.on('error', (error: NodeJS.ErrnoException) => {
  if (error.code !== 'EPIPE') throw error;
  process.exit(0);
});

if (process.argv[1] && import.meta.url === pathToFileURL(await realPath(process.argv[1])).href)
  process.exitCode = await main(process.argv.slice(2));

/** npx starts the program through a link. */
async function realPath(path: string): Promise<string> {
  const { realpath } = await import('node:fs/promises');
  return realpath(path).catch(() => path);
}
