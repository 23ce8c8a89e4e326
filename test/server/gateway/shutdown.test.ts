import { describe, expect, it } from 'vitest';
import { openStore } from '../../../server/store/openStore.ts';
import { temporaryFolder } from '../store/temporaryFolder.ts';
import { connect, serve, until } from './harness.ts';

describe('a server that is stopped under load', () => {
  it('has on disk what it acknowledged, acknowledges what it took, and says goodbye', async () => {
    const folder = temporaryFolder();
    const server = await serve(folder);
    const lines = await Promise.all(
      ['a', 'b', 'c', 'd'].map(async (channel) => {
        const line = await connect(server.port);
        line.say({ hello: 1, run: 'r', channels: [{ channel, interval: 0.01 }] });
        await line.heard((reply) => 'window' in reply);
        return { channel, line, sent: 0 };
      }),
    );
    const values = Array.from({ length: 200 }, (_, i) => Math.sin(i));
    const acked = ({ line }: (typeof lines)[number]) =>
      line.replies.reduce((most, reply) => ('ack' in reply ? Math.max(most, reply.ack) : most), -1);
    let all = 0;
    const sending = setInterval(() => {
      for (const each of lines)
        while (each.sent - acked(each) < 200) {
          each.line.say({ channel: each.channel, seq: each.sent, t0: 2 * each.sent, dt: 0.01, values });
          each.sent++;
          all++;
        }
    }, 1);
    await until(() => lines.every((each) => acked(each) > 300));
    await server.close();
    clearInterval(sending);
    expect(all).toBeGreaterThan(1200);
    for (const { line } of lines)
      expect(await line.closed).toEqual({ code: 1001, reason: 'the server is stopping' });
    const store = openStore(folder, { commitEvery: 0.01 });
    for (const each of lines) {
      const { next } = await store.run(each.channel, 'r');
      expect(next, each.channel).toBeGreaterThan(acked(each));
      // what was taken was acknowledged before the goodbye, all of it
      expect(next - 1, each.channel).toBe(acked(each));
      const { values: stored } = await store.samplesFrom(each.channel, 200 * (next - 1), 1000);
      expect([...stored]).toEqual(values);
    }
    await store.close();
  });
});
