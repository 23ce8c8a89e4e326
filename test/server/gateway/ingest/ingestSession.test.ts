import { beforeEach, describe, expect, it } from 'vitest';
import {
  createIngestSession,
  type IngestSession,
  type Settled,
} from '../../../../server/gateway/ingest/ingestSession.ts';
import type { FrameToStore, StoredRun } from '../../../../server/store/store.ts';
import type { IngestReply } from '../../../../shared-types/ingest.ts';

let replies: IngestReply[];
let taken: FrameToStore[];
let skipped: number[];
let holes: [number, number][];
let pending: Settled[];
let closed: number | null;
let stored: StoredRun;
let newest: number | null;
let session: IngestSession;

function open(window = 4): void {
  session = createIngestSession(
    {
      greet: async (hello) => ({
        ok: true,
        runs: new Map(hello.channels.map(({ channel }) => [channel, stored])),
      }),
      claim: () => null,
      newest: () => newest,
      take(frame, _arrival, settled) {
        taken.push(frame);
        newest = frame.times ? frame.times.at(-1)! : frame.t0 + frame.dt * (frame.values.length - 1);
        pending.push(settled);
      },
      skip(_channel, _run, seq, _digest, settled) {
        skipped.push(seq);
        pending.push(settled);
      },
      hole: (_channel, from, to) => holes.push([from, to]),
      refused: () => {},
      reply: (reply) => replies.push(reply),
      close: (code) => (closed = code),
    },
    { window, largestFrame: 100 },
  );
}

beforeEach(() => {
  replies = [];
  taken = [];
  skipped = [];
  holes = [];
  pending = [];
  closed = null;
  stored = { next: 0, digests: new Map() };
  newest = null;
  open();
});

const tick = () => new Promise((resolve) => setImmediate(resolve));
const say = (message: object) => session.message(JSON.stringify(message), 1000);
const send = (seq: number, value = seq) => say({ channel: 'c', seq, t0: seq, dt: 1, values: [value] });
const durable = async (count: number) => {
  for (const settled of pending.splice(0, count)) settled(null);
  await tick();
};
async function greet() {
  say({ hello: 1, run: 'r', channels: [{ channel: 'c' }] });
  await tick();
  replies.length = 0;
}
const codes = () => replies.flatMap((reply) => ('error' in reply ? [reply.code] : []));

describe('a producer with hello', () => {
  it('is told where its run stands and how many frames may be unacknowledged', async () => {
    stored = { next: 7, digests: new Map() };
    say({ hello: 1, run: 'r', channels: [{ channel: 'c' }] });
    await tick();
    expect(replies).toEqual([{ resume: 7, channel: 'c' }, { window: 4 }]);
  });

  it('is acknowledged cumulatively, and only once frames are durable', async () => {
    await greet();
    for (const seq of [0, 1, 2]) send(seq);
    await tick();
    expect(replies).toEqual([]);
    await durable(2);
    expect(replies).toEqual([{ ack: 1, channel: 'c' }]);
    await durable(1);
    expect(replies).toEqual([
      { ack: 1, channel: 'c' },
      { ack: 2, channel: 'c' },
    ]);
  });

  it('changes nothing by sending a durable frame again, and is acknowledged again', async () => {
    await greet();
    send(0);
    await durable(1);
    send(0);
    expect(taken).toHaveLength(1);
    expect(replies).toEqual([
      { ack: 0, channel: 'c' },
      { ack: 0, channel: 'c' },
    ]);
  });

  it('is not acknowledged for a frame sent again before it is durable', async () => {
    await greet();
    send(0);
    send(0);
    expect(taken).toHaveLength(1);
    expect(replies).toEqual([]);
  });

  it('is told when a number comes with other content, and the first content stays', async () => {
    await greet();
    send(0, 1);
    send(0, 2);
    expect(codes()).toEqual(['OTHER_CONTENT']);
    expect(taken.map(({ values }) => values[0])).toEqual([1]);
  });

  it('leaves a recorded hole where it skips numbers', async () => {
    await greet();
    send(0);
    send(3);
    expect(holes).toEqual([[1, 2]]);
    expect(taken.map(({ seq }) => seq)).toEqual([0, 3]);
    expect(codes()).toEqual([]);
  });

  it('harms no other frame by one that cannot be used, which counts as consumed', async () => {
    await greet();
    send(0);
    say({ channel: 'c', seq: 1, t0: 1, dt: 1, values: ['x'] });
    send(2);
    expect(replies).toMatchObject([{ code: 'BAD_VALUES', channel: 'c', seq: 1 }]);
    expect(skipped).toEqual([1]);
    expect(holes).toEqual([]);
    await durable(3);
    expect(replies.at(-1)).toEqual({ ack: 2, channel: 'c' });
  });

  it('is told of times that go backwards, and what is later goes on', async () => {
    await greet();
    send(5 - 5);
    say({ channel: 'c', seq: 1, t0: 0, dt: 1, values: [1] });
    say({ channel: 'c', seq: 2, t0: 1, dt: 1, values: [1] });
    expect(codes()).toEqual(['TIME_BACKWARDS']);
    expect(taken.map(({ seq }) => seq)).toEqual([0, 2]);
  });

  it('is told of channels it did not name and of frames without number', async () => {
    await greet();
    say({ channel: 'd', seq: 0, t0: 1, dt: 1, values: [1] });
    say({ channel: 'c', t0: 1, dt: 1, values: [1] });
    session.message('{', 1000);
    expect(codes()).toEqual(['NO_SUCH_CHANNEL', 'NO_SEQ', 'NOT_JSON']);
  });

  it('loses nothing when it overruns the window: frames are not consumed until sent again', async () => {
    await greet();
    for (const seq of [0, 1, 2, 3, 4, 5]) send(seq);
    expect(codes()).toEqual(['TOO_MANY_UNACKNOWLEDGED', 'TOO_MANY_UNACKNOWLEDGED']);
    await durable(4);
    send(6);
    expect(taken.map(({ seq }) => seq)).toEqual([0, 1, 2, 3]);
    for (const seq of [4, 5, 6]) send(seq);
    expect(taken.map(({ seq }) => seq)).toEqual([0, 1, 2, 3, 4, 5, 6]);
    expect(holes).toEqual([]);
    expect(closed).toBeNull();
  });

  it('is hung up on with 1008 when it goes on overrunning', async () => {
    await greet();
    for (let seq = 0; seq < 12; seq++) send(seq);
    expect(closed).toBe(1008);
  });

  it('is told of a frame that could not be written, and hung up on with 1013 before any later one looks durable', async () => {
    await greet();
    for (let seq = 0; seq < 4; seq++) send(seq);
    pending.shift()!(null);
    pending.shift()!('the disk is full');
    pending.shift()!(null);
    pending.shift()!('the disk is full');
    send(4);
    await tick();
    expect(replies).toMatchObject([
      { ack: 0, channel: 'c' },
      { code: 'NOT_STORED', channel: 'c', seq: 1 },
    ]);
    expect([closed, taken.length]).toEqual([1013, 4]);
  });

  it('may send frames before the answer to its hello', async () => {
    say({ hello: 1, run: 'r', channels: [{ channel: 'c' }] });
    send(0);
    await tick();
    expect(taken).toHaveLength(1);
  });

  it('is hung up on after a bad hello, and told after a second one', async () => {
    say({ hello: 1, run: '', channels: [{ channel: 'c' }] });
    expect(closed).toBe(1008);
    open();
    await greet();
    say({ hello: 1, run: 'r', channels: [{ channel: 'c' }] });
    expect(codes()).toEqual(['BAD_HELLO']);
  });

  it('takes nothing more once it has ended', async () => {
    await greet();
    send(0);
    session.end();
    send(1);
    await durable(1);
    expect(taken).toHaveLength(1);
    expect(replies).toEqual([]);
  });
});

describe('a producer without hello', () => {
  it('has its frames stamped on arrival, regular ones staying regular', () => {
    session.message('{"channel":"c","dt":1,"values":[1,2,3]}', 1000);
    session.message('{"channel":"c","dt":1,"values":[4,5]}', 1002.3);
    expect(taken.map(({ t0, dt, seq, run }) => ({ t0, dt, seq, run }))).toEqual([
      { t0: 998, dt: 1, seq: -1, run: '' },
      { t0: 1001, dt: 1, seq: -1, run: '' },
    ]);
  });

  it('may send single values without dt', () => {
    session.message('{"channel":"c","values":[1]}', 1000);
    session.message('{"channel":"c","values":[2]}', 1000.25);
    expect(taken.map(({ times }) => [...times!])).toEqual([[1000], [1000.25]]);
  });

  it('is told in words what is missing', () => {
    session.message('{"channel":"c","values":[1,2]}', 1000);
    session.message('{"channel":"c","seq":0,"dt":1,"values":[1]}', 1000);
    session.message('nothing', 1000);
    expect(codes()).toEqual(['BAD_TIMES', 'BAD_HELLO', 'NOT_JSON']);
    expect(taken).toEqual([]);
  });
});
