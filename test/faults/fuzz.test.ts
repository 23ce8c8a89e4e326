/**
 * Every reader of bytes from outside, given what it does not expect: random, and whole ones spoilt a little. It reads them
 * or refuses them in words with a code; it never throws anything else, takes long, or asks for memory by the say of a file.
 */
import { readdirSync, readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { Encoder } from 'cbor-x';
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { decodeMessage } from '../../server/gateway/ingest/ingestFrame.ts';
import { startServer } from '../../server/gateway/server.ts';
import { modelFromJson } from '../../server/model/modelFile.ts';
import { readCsv } from '../../server/recordings/csv.ts';
import { InputError } from '../../server/signal/inputError.ts';
import { readBackup, writeBackup } from '../../server/store/backup.ts';
import { openStore } from '../../server/store/openStore.ts';
import { StoreError } from '../../server/store/storeError.ts';
import { createWatch } from '../../server/watch/watch.ts';
import { Settings } from '../../shared-types/settings.ts';
import { api, connect, serve, swing, swingModelJson, until } from '../server/gateway/harness.ts';
import { frame, temporaryFolder } from '../server/store/temporaryFolder.ts';
import { WHOLE } from './report.ts';

const SEED = 20_261_201;
const runs = (few: number) => ({ seed: SEED, numRuns: WHOLE ? 40 * few : few });
const LONGEST_MILLISECONDS = 3000;
const encoder = new Encoder({ useRecords: false });

/** Bytes of a whole document with a few changed, cut off, doubled or put in. */
const spoilt = (whole: Uint8Array): fc.Arbitrary<Uint8Array> =>
  fc
    .array(
      fc.record({
        how: fc.constantFrom('change', 'cut', 'double', 'put in'),
        at: fc.double({ min: 0, max: 1, noNaN: true, maxExcluded: true }),
        bytes: fc.uint8Array({ minLength: 1, maxLength: 12 }),
      }),
      { minLength: 1, maxLength: 4 },
    )
    .map((changes) => {
      let bytes: Uint8Array = Uint8Array.from(whole);
      for (const { how, at, bytes: some } of changes) {
        const place = Math.floor(at * bytes.length);
        if (how === 'change') bytes.set(some.subarray(0, bytes.length - place), place);
        else if (how === 'cut') bytes = bytes.subarray(0, place);
        else {
          const middle = how === 'double' ? bytes.slice(place, place + 40) : some;
          bytes = Uint8Array.from([...bytes.subarray(0, place), ...middle, ...bytes.subarray(place)]);
        }
      }
      return bytes;
    });

/** A JSON document with one of its parts replaced by something else. */
const otherPart = (document: unknown): fc.Arbitrary<unknown> =>
  fc.tuple(fc.array(fc.nat(), { maxLength: 6 }), awkward).map(([path, part]) => {
    const copy = structuredClone(document) as Record<string, unknown>;
    let at: Record<string, unknown> = copy;
    for (const [depth, step] of path.entries()) {
      const keys = Object.keys(at);
      if (keys.length === 0) break;
      const key = keys[step % keys.length]!;
      const inner = at[key];
      if (depth === path.length - 1 || typeof inner !== 'object' || inner === null) {
        at[key] = part;
        break;
      }
      at = inner as Record<string, unknown>;
    }
    return copy;
  });

const awkward: fc.Arbitrary<unknown> = fc.oneof(
  fc.jsonValue(),
  fc.constantFrom<unknown>(-1, 0, 0.5, 1e9, 1e308, 2 ** 53, '', 'AAAA', null, [], {}, '__proto__', [[]], ' '),
);

/** Runs a reader: what it gave, or the fault, which must be one of those named and say something in one line. */
function readOr<T>(read: () => T, ...faults: (abstract new (...args: never[]) => Error)[]): T | null {
  const began = performance.now();
  try {
    return read();
  } catch (fault) {
    if (!faults.some((each) => fault instanceof each)) throw fault;
    const { message, code } = fault as Error & { code?: string };
    expect(message.length).toBeGreaterThan(20);
    expect(message).not.toContain('\n');
    expect(code).toMatch(/^[A-Z_]+$/);
    return null;
  } finally {
    expect(performance.now() - began).toBeLessThan(LONGEST_MILLISECONDS);
  }
}

/** Every place of the HTTP interface, as its source has them; `*` for a part that varies. */
const gateway = new URL('../../server/gateway/http/', import.meta.url);
const PLACES = readdirSync(gateway)
  .filter((name) => name.startsWith('http'))
  .flatMap((name) => readFileSync(new URL(name, gateway), 'utf8').match(/'\/(?:api|health)[^']*'/g) ?? [])
  .map((quoted) => quoted.slice(1, -1).replace(/:\w+/g, '*'));

/** Without half a surrogate pair, which no address can hold. */
const wellFormed = (text: string) => new TextDecoder().decode(new TextEncoder().encode(text));

const bytesOf = (text: string) => new TextEncoder().encode(text);
const goodFrame = { channel: 'c', seq: 0, t0: 0, dt: 0.1, values: [1, null, 3] };

describe('what comes from producers', () => {
  const messages = fc.oneof(
    fc.string(),
    fc.uint8Array({ maxLength: 200 }),
    awkward.map((value) => JSON.stringify(value)),
    otherPart(goodFrame).map((value) => JSON.stringify(value)),
    otherPart({ hello: 1, run: 'r', channels: [{ channel: 'c' }] }).map((value) => JSON.stringify(value)),
    otherPart(goodFrame).map((value) => Uint8Array.from(encoder.encode(value))),
    spoilt(Uint8Array.from(encoder.encode({ ...goodFrame, values: Float64Array.of(1, 2, 3) }))),
  );

  it('is a frame, a hello, or an error in words', () => {
    fc.assert(
      fc.property(messages, (message) => {
        const decoded = readOr(() => decodeMessage(message, 1000))!;
        if (decoded.ok) return;
        expect(decoded.code).toMatch(/^[A-Z_]+$/);
        expect(decoded.detail.length).toBeGreaterThan(10);
      }),
      runs(1500),
    );
  });

  it('leaves the server serving, whatever the order', async () => {
    const { port } = await serve(temporaryFolder());
    await fc.assert(
      fc.asyncProperty(fc.array(messages, { minLength: 1, maxLength: 40 }), async (all) => {
        const line = await connect(port);
        for (const message of all) line.say(message);
        await new Promise((resolve) => setTimeout(resolve, 5));
        line.close();
        expect((await api(port, '/health')).status).toBe(200);
      }),
      runs(40),
    );
    const line = await connect(port);
    line.say({ hello: 1, run: 'after', channels: [{ channel: 'after all' }] });
    line.say({ ...goodFrame, channel: 'after all' });
    await line.heard((reply) => 'ack' in reply);
  });
});

describe('what comes over HTTP', () => {
  it('is answered without a failure of the server', async () => {
    const { port } = await serve(temporaryFolder());
    expect(PLACES.length).toBeGreaterThan(30);
    await fetch(`http://127.0.0.1:${port}/api/models`, { method: 'POST', body: swingModelJson() });
    const text = fc.oneof(
      fc.string({ maxLength: 30 }),
      fc.constantFrom('c', '..', '%00', '-1', '1e999', 'NaN', '😀'),
    );
    const request = fc.record({
      method: fc.constantFrom('GET', 'POST', 'DELETE', 'PUT', 'HEAD'),
      place: fc.constantFrom(...PLACES),
      part: text,
      query: fc.dictionary(
        fc.constantFrom('after', 'channel', 'from', 'to', 'columns', 'most', 'kinds', 'q'),
        text,
      ),
      body: fc.oneof(
        fc.string(),
        awkward.map((value) => JSON.stringify(value)),
        otherPart({
          model: 'swing',
          channels: ['c'],
          action: 'shelve',
          seconds: 5,
          reason: 'x',
          by: 'me',
        }).map((value) => JSON.stringify(value)),
      ),
    });
    await fc.assert(
      fc.asyncProperty(request, async ({ method, place, part, query, body }) => {
        const path = place.replaceAll('*', encodeURIComponent(wellFormed(part)));
        const search = new URLSearchParams(
          Object.entries(query).map(([key, value]) => [key, wellFormed(value)]),
        );
        const began = performance.now();
        const response = await fetch(`http://127.0.0.1:${port}${path}?${search}`, {
          method,
          ...(method === 'POST' || method === 'PUT' ? { body } : {}),
        });
        const answer = await response.text();
        expect(response.status, `${method} ${path}?${search} ${body}: ${answer.slice(0, 300)}`).toBeLessThan(
          500,
        );
        expect(performance.now() - began).toBeLessThan(LONGEST_MILLISECONDS);
      }),
      runs(300),
    );
    expect((await api(port, '/health')).status).toBe(200);
  });
});

describe('files', () => {
  it('of recordings are read or refused in words', () => {
    const whole = 'time,c,d\n0,1,2\n0.1,,3\n0.2,"4",5e-1\n2026-12-01T00:00:00Z,1,2\n';
    const texts = fc.oneof(fc.string().map(bytesOf), fc.uint8Array(), spoilt(bytesOf(whole)));
    fc.assert(
      fc.property(texts, (bytes) => {
        readOr(() => readCsv(bytes, 'file.csv'), InputError);
      }),
      runs(1500),
    );
  });

  const model = JSON.parse(swingModelJson()) as unknown;
  const models = fc.oneof(
    fc.string(),
    otherPart(model).map((value) => JSON.stringify(value)),
    spoilt(bytesOf(swingModelJson())).map((bytes) => new TextDecoder().decode(bytes)),
  );
  it('of models are read or refused in words, and one that is read can be watched or is refused', () => {
    fc.assert(
      fc.property(models, (text) => {
        const read = readOr(() => modelFromJson(text), InputError);
        if (read === null) return;
        try {
          const { rule, regime } = read;
          const channels = read.channels.map(({ channel }) => channel);
          const watch = createWatch({ model: read, channels, rule, regime, regimeChannel: null });
          for (const channel of channels)
            watch.push({ channel, t0: 0, dt: 0.1, times: null, values: swing(0, 50) }, []);
        } catch (fault) {
          expect(fault, text).toBeInstanceOf(RangeError);
        }
      }),
      runs(600),
    );
  });

  it('of settings are read or refused key by key', () => {
    const whole = { ...Settings.parse({}), keepFor: 86_400, largestStore: 1e9 };
    fc.assert(
      fc.property(fc.oneof(awkward, otherPart(whole)), (value) => {
        const parsed = Settings.safeParse(value);
        if (!parsed.success) {
          expect(parsed.error.issues[0]!.message.length).toBeGreaterThan(5);
          return;
        }
        const { ingestWindow, largestFrame, commitEvery, recordingGap, keepFor, largestStore } = parsed.data;
        for (const each of [ingestWindow, largestFrame, commitEvery, recordingGap, keepFor, largestStore])
          expect(each === null || each > 0).toBe(true);
      }),
      runs(500),
    );
  });

  it('of backups are read or refused in words, and what was read opens', async () => {
    const folder = temporaryFolder();
    const store = openStore(folder, { commitEvery: 0.005 });
    await store.appendFrames([frame(0, 0, new Float64Array(3000))]);
    await store.close();
    const file = join(temporaryFolder(), 'copy.db');
    writeBackup(folder, file, { madeAt: 1, program: 'foreshift test', settings: '{}' });
    const whole = readFileSync(file);
    const changes = fc.oneof(
      { weight: 3, arbitrary: spoilt(whole) },
      {
        weight: 1,
        arbitrary: spoilt(whole.subarray(0, 4096)).map((head) => Buffer.concat([head, whole.subarray(4096)])),
      },
      { weight: 1, arbitrary: fc.uint8Array({ maxLength: 5000 }) },
    );
    await fc.assert(
      fc.asyncProperty(changes, async (bytes) => {
        const bad = join(temporaryFolder(), 'bad.db');
        writeFileSync(bad, bytes);
        const target = temporaryFolder();
        if (readOr(() => readBackup(bad, target), StoreError) === null) return;
        const opened = readOr(() => openStore(target, { commitEvery: 0.005 }), StoreError);
        await opened?.close();
      }),
      runs(60),
    );
  });
});

describe('what a watch remembers', () => {
  /** A folder with a watch that has seen 400 samples, and its snapshot. */
  async function watched() {
    const folder = temporaryFolder();
    const server = await serve(folder);
    const line = await connect(server.port);
    line.say({ hello: 1, run: 'r', channels: [{ channel: 'c', interval: 0.1 }] });
    await line.heard((reply) => 'window' in reply);
    const post = (path: string, body: string) =>
      fetch(`http://127.0.0.1:${server.port}${path}`, { method: 'POST', body });
    await post('/api/models', swingModelJson());
    await post('/api/watches', JSON.stringify({ model: 'swing', channels: ['c'] }));
    line.say({ channel: 'c', seq: 0, t0: 0, dt: 0.1, values: [...swing(0, 400)] });
    await line.heard((reply) => 'ack' in reply);
    await until(async () => (await api(server.port, '/api/warnings')).json.length > 0);
    await server.close();
    const store = openStore(folder, { commitEvery: 0.005 });
    const [stored] = await store.watches();
    await store.close();
    return { folder, stored: stored! };
  }

  it('spoilt in any way leaves a server that starts, says so in words, and takes samples', async () => {
    const { folder, stored } = await watched();
    let seq = 1;
    const outcomes = new Set<string>();
    await fc.assert(
      fc.asyncProperty(
        fc.oneof(spoilt(stored.snapshot!), fc.uint8Array()),
        fc.oneof(
          { weight: 4, arbitrary: fc.constant(stored.settings) },
          otherPart(JSON.parse(stored.settings)).map((value) => JSON.stringify(value)),
        ),
        async (snapshot, settings) => {
          const store = openStore(folder, { commitEvery: 0.005 });
          await store.saveWatch({ ...stored, settings, snapshot });
          const said: string[] = [];
          const server = await startServer({
            port: 0,
            listen: '127.0.0.1',
            store,
            demo: false,
            program: 'foreshift test',
            createWatch,
            readModel: modelFromJson,
            warn: (text) => said.push(text),
          });
          const line = await connect(server.port);
          line.say({ hello: 1, run: 'r', channels: [{ channel: 'c', interval: 0.1 }] });
          await line.heard((reply) => 'window' in reply);
          line.say({ channel: 'c', seq, t0: 40 * seq, dt: 0.1, values: [...swing(seq * 400, 400)] });
          await line.heard((reply) => 'ack' in reply && reply.ack >= seq);
          seq++;
          expect((await api(server.port, '/api/watches')).status).toBe(200);
          line.close();
          await server.close();
          for (const text of said) expect(text).toMatch(/^(watch|what the watch) "[^\n]*$/);
          outcomes.add(said.length === 0 ? 'went on' : said[0]!.replace(/".*"|\(.*\)/g, '…'));
        },
      ),
      runs(25),
    );
    expect(outcomes.size).toBeGreaterThan(1);
  }, 600_000);
});
