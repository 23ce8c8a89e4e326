import { expect, it } from 'vitest';
import { temporaryFolder } from '../store/temporaryFolder.ts';
import { connect, serve, until } from './harness.ts';

it('a producer whose clock is ahead is flagged in its state, in the log and in the logbook', async () => {
  const lines: string[] = [];
  const { hub, port } = await serve(
    temporaryFolder(),
    {},
    { log: ({ event, text }) => lines.push(`${event}: ${text}`) },
  );
  const line = await connect(port);
  line.say({ hello: 1, run: 'r', channels: [{ channel: 'c', interval: 0.1 }] });
  await line.heard((reply) => 'window' in reply);
  let seq = 0;
  const send = () => {
    line.say({ channel: 'c', seq: seq++, t0: Date.now() / 1000 + 60, dt: 0.1, values: [1] });
  };
  const sending = setInterval(send, 100);
  try {
    await until(() => hub.channels.state('c', hub.now()).clockWrong === true);
  } finally {
    clearInterval(sending);
  }
  const said = /the times of "c" are (59\.\d|60\.0) s ahead of the server's clock/;
  expect(lines.find((each) => each.startsWith('channel clock'))).toMatch(said);
  await until(async () =>
    (await hub.store.logEntries({ newest: true, most: 10 })).some(
      ({ text, channel }) => channel === 'c' && said.test(text),
    ),
  );
});
