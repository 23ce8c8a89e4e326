import { decode } from 'cbor-x';
import { afterEach, describe, expect, it } from 'vitest';
import {
  createFeedSession,
  DROP_DRAWING_BYTES,
  type FeedSession,
} from '../../../../server/gateway/feed/feed.ts';
import type { Hub } from '../../../../server/gateway/hub.ts';
import type { FeedMessage } from '../../../../shared-types/feed.ts';
import { temporaryFolder } from '../../store/temporaryFolder.ts';
import { connect, type Line, serve, swing, swingModelJson, until } from '../harness.ts';

const FACTS = { program: 'test', startedAt: 0, demo: false, ingestAddress: 'ws://127.0.0.1/ingest' };
const pages: FeedSession[] = [];
afterEach(() => {
  for (const page of pages.splice(0)) page.end();
});

/** A page without a socket; `waiting` is what its socket would hold back. */
function open(hub: Hub) {
  const page = { messages: [] as FeedMessage[], waiting: 0, closed: null as number | null };
  const session = createFeedSession(
    hub,
    {
      send(bytes, written) {
        page.messages.push(decode(bytes) as FeedMessage);
        written?.();
      },
      waiting: () => page.waiting,
      close: (code) => (page.closed = code),
    },
    FACTS,
  );
  pages.push(session);
  return { page, session };
}

const look = (session: FeedSession, seconds: number, columns: number) =>
  session.request(JSON.stringify({ look: { seconds, columns } }));

const of = <K extends FeedMessage['kind']>(messages: FeedMessage[], kind: K) =>
  messages.filter((message): message is Extract<FeedMessage, { kind: K }> => message.kind === kind);

/** What a page would have drawn of channel "c" by following the messages. */
function drawn(messages: FeedMessage[]): [number, number, number][] {
  let line: [number, number, number][] = [];
  for (const { columns, replace } of of(messages, 'signal')) {
    if (replace) line = [];
    columns.t.forEach((t, i) => {
      line = line.filter(([start]) => start < t);
      line.push([t, columns.low[i]!, columns.high[i]!]);
    });
  }
  return line;
}

async function producer(port: number): Promise<Line> {
  const line = await connect(port);
  line.say({ hello: 1, run: 'r', channels: [{ channel: 'c', interval: 0.1 }] });
  await line.heard((reply) => 'window' in reply);
  return line;
}

const send = (line: Line, seq: number) =>
  line.say({ channel: 'c', seq, t0: seq, dt: 0.1, values: [...swing(10 * seq, 10)] });

describe("a page's feed", () => {
  it('begins with a welcome and goes on with a beat', async () => {
    const { hub } = await serve(temporaryFolder());
    const { page } = open(hub);
    await until(() => of(page.messages, 'beat').length > 0);
    expect(page.messages[0]).toMatchObject({
      kind: 'welcome',
      welcome: { program: 'test', channels: [], warnings: [] },
    });
  });

  it('draws every sample once, those before the page looked and those after', async () => {
    const { hub, port } = await serve(temporaryFolder());
    const line = await producer(port);
    for (let seq = 0; seq < 10; seq++) send(line, seq);
    await line.heard((reply) => 'ack' in reply && reply.ack === 9);
    const { page, session } = open(hub);
    look(session, 1000, 10_000);
    for (let seq = 10; seq < 20; seq++) send(line, seq);
    await until(() => drawn(page.messages).length === 200);
    const line200 = drawn(page.messages);
    expect(line200.map(([, low]) => low)).toEqual([...swing(0, 200)]);
    expect(line200.map(([, low, high]) => high - low)).toEqual(new Array(200).fill(0));
  });

  it('thins to the columns the page has, keeping the extremes', async () => {
    const { hub, port } = await serve(temporaryFolder());
    const line = await producer(port);
    const { page, session } = open(hub);
    look(session, 100, 20);
    for (let seq = 0; seq < 50; seq++) send(line, seq);
    await line.heard((reply) => 'ack' in reply && reply.ack === 49);
    await until(() => (drawn(page.messages).at(-1)?.[0] ?? 0) >= 45);
    const columns = drawn(page.messages);
    expect(columns.length).toBeLessThan(40);
    const all = [...swing(0, 500)];
    expect(Math.max(...columns.map(([, , high]) => high))).toBe(Math.max(...all));
    expect(Math.min(...columns.map(([, low]) => low))).toBe(Math.min(...all));
  });

  it('gives a slow page no drawing data but every warning, and heals the drawing later', async () => {
    const { hub, port } = await serve(temporaryFolder());
    await hub.watches.add({
      model: await hub.watches.addModel(swingModelJson()),
      channels: ['c'],
      reaction: 30,
    });
    const line = await producer(port);
    const { page, session } = open(hub);
    look(session, 1000, 10_000);
    send(line, 0);
    await until(() => drawn(page.messages).length === 10);
    page.waiting = DROP_DRAWING_BYTES + 1;
    const before = of(page.messages, 'signal').length;
    for (let seq = 1; seq < 40; seq++) send(line, seq);
    await line.heard((reply) => 'ack' in reply && reply.ack === 39);
    await until(() => of(page.messages, 'warning').some(({ warning }) => warning.deliveredAt !== null));
    await new Promise((resolve) => setTimeout(resolve, 300));
    expect(of(page.messages, 'signal')).toHaveLength(before);
    const issued = await hub.store.warnings({});
    const ids = new Set(of(page.messages, 'warning').map(({ warning }) => warning.id));
    expect([...ids]).toEqual(issued.map(({ id }) => id));
    expect(ids.size).toBeGreaterThan(1);
    page.waiting = 0;
    await until(() => drawn(page.messages).length === 400);
    expect(drawn(page.messages).map(([, low]) => low)).toEqual([...swing(0, 400)]);
  });

  it('hangs up on a page that asks for what is none of its business', async () => {
    const { hub } = await serve(temporaryFolder());
    const { page, session } = open(hub);
    session.request('{"look":{"seconds":-1,"columns":10}}');
    expect(page.closed).toBe(1008);
  });
});
