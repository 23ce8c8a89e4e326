import { readdirSync, readFileSync } from 'node:fs';
import { dirname, join, relative, resolve } from 'node:path';
import { fileURLToPath } from 'node:url';
import { describe, expect, it } from 'vitest';

const TOP = fileURLToPath(new URL('../..', import.meta.url));

/** Rooms of the server in the data's order: a room may import its own files and those of rooms before it. */
const ORDER = [
  'signal',
  'embedding',
  'model',
  'watch',
  'rehearsal',
  'recordings',
  'store',
  'gateway',
  'commands',
];
/** The simulated rigs stand beside the way of the data: they know nothing of it. */
const ALLOWED: Record<string, string[]> = {
  commands: [...ORDER, 'rigs'],
  rigs: ['signal'],
  store: ORDER.slice(0, 5),
  recordings: [...ORDER.slice(0, 5), 'store'],
};
const PURE = ['signal', 'embedding', 'model', 'watch', 'rehearsal', 'rigs'];
/** What a pure room may take from the registry. */
const PURE_PACKAGES = ['ml-matrix'];

/** Words by which I/O, a clock, a timer or chance would come in without an import. */
const IMPURE =
  /\b(Math\.random|Date\.now|new Date\(\)|performance\.now|setTimeout|setInterval|setImmediate|queueMicrotask|console\.|process\.|fetch\(|globalThis\.crypto)/;

interface SourceFile {
  path: string;
  text: string;
  imports: string[];
}

function sourcesUnder(folder: string): SourceFile[] {
  return readdirSync(join(TOP, folder), { recursive: true, withFileTypes: true })
    .filter((entry) => entry.isFile() && entry.name.endsWith('.ts') && !entry.name.endsWith('.config.ts'))
    .map((entry) => {
      const path = relative(TOP, join(entry.parentPath, entry.name));
      const text = readFileSync(join(TOP, path), 'utf8');
      return { path, text, imports: importsOf(text) };
    });
}

function importsOf(text: string): string[] {
  const code = text.replace(/\/\*[\s\S]*?\*\//g, '').replace(/^\s*\/\/.*$/gm, '');
  const found = code.matchAll(/(?:\bfrom\s*|\bimport\s*\(\s*|\bimport\s+)(['"])([^'"]+)\1/g);
  return [...found].map((match) => match[2]!);
}

const roomOf = (path: string): string => path.split('/')[1] ?? '';

/** The file an import names, from the top of the project; null for a package. */
const target = (file: SourceFile, name: string): string | null =>
  name.startsWith('.') ? relative(TOP, resolve(TOP, dirname(file.path), name)) : null;

function faultsOfServer(file: SourceFile): string[] {
  const room = roomOf(file.path);
  const allowed = ALLOWED[room] ?? ORDER.slice(0, ORDER.indexOf(room));
  return file.imports.flatMap((name) => {
    const to = target(file, name);
    if (to === null) {
      const pure = PURE.includes(room) && !PURE_PACKAGES.includes(name);
      return pure ? [`${file.path} → ${name}: ${room} is pure`] : [];
    }
    if (to.startsWith('shared-types/')) return [];
    if (!to.startsWith('server/')) return [`${file.path} → ${to}: outside the server`];
    return roomOf(to) === room || allowed.includes(roomOf(to))
      ? []
      : [`${file.path} → ${to}: ${room} may not import ${roomOf(to)}`];
  });
}

describe('the rules of the house', () => {
  const server = sourcesUnder('server');

  it('finds the sources it is to judge, in rooms it knows', () => {
    expect(server.length).toBeGreaterThan(50);
    const unknown = server
      .map(({ path }) => roomOf(path))
      .filter((room) => ![...ORDER, 'rigs'].includes(room));
    expect(unknown).toEqual([]);
    expect(
      importsOf("import { a } from './a.ts';\nexport * from \"./b.ts\";\nawait import('./c.ts')"),
    ).toHaveLength(3);
  });

  it('lets no room of the server import upwards, and pure rooms nothing that does I/O', () => {
    expect(server.flatMap(faultsOfServer)).toEqual([]);
  });

  it('keeps clocks, timers, chance and the console out of the pure rooms', () => {
    const faults = server
      .filter(({ path }) => PURE.includes(roomOf(path)))
      .flatMap(({ path, text }) => {
        const found = IMPURE.exec(text.replace(/\/\*[\s\S]*?\*\//g, '').replace(/\/\/.*$/gm, ''));
        return found === null ? [] : [`${path}: ${found[0]}`];
      });
    expect(faults).toEqual([]);
  });

  it('lets the client import shared-types and itself alone', () => {
    const client = sourcesUnder('client');
    expect(client.length).toBeGreaterThan(5);
    const faults = client.flatMap((file) =>
      file.imports.flatMap((name) => {
        const to = target(file, name);
        if (to === null) return name.startsWith('node:') ? [`${file.path} → ${name}`] : [];
        return to.startsWith('client/') || to.startsWith('shared-types/') ? [] : [`${file.path} → ${to}`];
      }),
    );
    expect(faults).toEqual([]);
  });

  it('lets shared-types import neither side, and nothing but the schemas', () => {
    const shared = sourcesUnder('shared-types');
    const faults = shared.flatMap((file) =>
      file.imports.flatMap((name) => {
        const to = target(file, name);
        return name === 'zod' || to?.startsWith('shared-types/') ? [] : [`${file.path} → ${name}`];
      }),
    );
    expect(faults).toEqual([]);
  });

  it('has no circle of imports', () => {
    const files = new Map(
      [...server, ...sourcesUnder('client'), ...sourcesUnder('shared-types')].map((file) => [
        file.path,
        file,
      ]),
    );
    const done = new Set<string>();
    const circles: string[] = [];
    const visit = (path: string, way: string[]): void => {
      if (way.includes(path)) circles.push([...way.slice(way.indexOf(path)), path].join(' → '));
      if (done.has(path) || way.includes(path)) return;
      const file = files.get(path);
      for (const name of file?.imports ?? []) {
        const to = file && target(file, name);
        if (to) visit(to, [...way, path]);
      }
      done.add(path);
    };
    for (const path of files.keys()) visit(path, []);
    expect(circles).toEqual([]);
  });

  it('has exactly the rooms at its top that its design names', () => {
    const listed = readdirSync(TOP).filter(
      (name) => !name.startsWith('.') && !['node_modules', 'dist', 'foreshift-data'].includes(name),
    );
    expect(listed.sort()).toEqual(
      [
        'DEVELOPERS.md',
        'LICENSE',
        'README.md',
        'client',
        'package-lock.json',
        'package.json',
        'server',
        'shared-types',
        'test',
        'tsconfig.json',
      ].sort(),
    );
  });
});
