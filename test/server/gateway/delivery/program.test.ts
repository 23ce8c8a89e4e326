import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import { createProgram } from '../../../../server/gateway/delivery/program.ts';
import { temporaryFolder } from '../../store/temporaryFolder.ts';
import { until } from '../harness.ts';

const never = new AbortController().signal;
const BODY = JSON.stringify({
  id: 'loop/12.5/issued',
  type: 'foreshift.warning.issued',
  data: { watch: 'loop', channels: ['dT; rm -rf $HOME'], at: 12.5, from: 22.5, to: 32.5, outcome: 'open' },
});
const environment = { ...process.env, FORESHIFT_TOKEN: 'a secret', LAMP_SECRET: 'another' };

const program = (folder: string, script: string, timeLimit = 5) =>
  createProgram({ command: [process.execPath, '-e', script], folder, timeLimit, environment });

describe('a program', () => {
  it('reads the event from its standard input, has its facts in the environment, and nothing else of the server’s', async () => {
    const folder = temporaryFolder();
    const script = `
      let text = '';
      process.stdin.on('data', (part) => { text += part; });
      process.stdin.on('end', () =>
        require('fs').writeFileSync('came.json', JSON.stringify({ text, env: process.env })));`;
    expect(await program(folder, script)(BODY, never)).toEqual({
      kind: 'delivered',
      text: 'the program ended well',
    });
    const { text, env } = JSON.parse(readFileSync(join(folder, 'came.json'), 'utf8'));
    expect(text).toBe(BODY);
    expect(env).toMatchObject({
      FORESHIFT_EVENT: 'loop/12.5/issued',
      FORESHIFT_WATCH: 'loop',
      FORESHIFT_CHANNEL: 'dT; rm -rf $HOME',
      FORESHIFT_AT: '12.5',
      FORESHIFT_TO: '32.5',
    });
    expect(env).not.toHaveProperty('FORESHIFT_TOKEN');
    expect(env).not.toHaveProperty('LAMP_SECRET');
  });

  it('gets its arguments as they are written: no shell reads them', async () => {
    const folder = temporaryFolder();
    const command = [
      process.execPath,
      '-e',
      `require('fs').writeFileSync('arguments.json', JSON.stringify(process.argv.slice(1)))`,
      '$HOME; touch broken',
      '`id`',
    ];
    await createProgram({ command, folder, timeLimit: 5, environment })(BODY, never);
    expect(JSON.parse(readFileSync(join(folder, 'arguments.json'), 'utf8'))).toEqual([
      '$HOME; touch broken',
      '`id`',
    ]);
  });

  it('that fails is not run again, and its last words are told', async () => {
    const failing = program(temporaryFolder(), `console.error('no such\\nrelay'); process.exit(3)`);
    expect(await failing(BODY, never)).toEqual({
      kind: 'refused',
      text: 'the program ended with 3: no such relay',
    });
  });

  it('that cannot be run is told', async () => {
    const missing = createProgram({
      command: ['/no/such/program'],
      folder: temporaryFolder(),
      timeLimit: 5,
      environment,
    });
    expect(await missing(BODY, never)).toMatchObject({
      kind: 'refused',
      text: expect.stringContaining('ENOENT'),
    });
  });

  it('that does not read what it is given is no worse for it', async () => {
    const long = JSON.stringify({ ...JSON.parse(BODY), padding: 'x'.repeat(1_000_000) });
    expect(await program(temporaryFolder(), 'process.exit(0)')(long, never)).toMatchObject({
      kind: 'delivered',
    });
  });

  it.runIf(process.platform !== 'win32')(
    'that takes too long is ended with all it started, though it will not hear of it',
    async () => {
      const folder = temporaryFolder();
      const script = `
        process.on('SIGTERM', () => {});
        const child = require('child_process').spawn(process.execPath, ['-e', 'setInterval(() => {}, 1000)'], { stdio: 'inherit' });
        require('fs').writeFileSync('id', String(child.pid));
        setInterval(() => {}, 1000);`;
      const began = performance.now();
      expect(await program(folder, script, 1)(BODY, never)).toEqual({
        kind: 'refused',
        text: 'the program took longer than 1 s and was ended',
      });
      expect(performance.now() - began).toBeLessThan(6000);
      const child = Number(readFileSync(join(folder, 'id'), 'utf8'));
      await until(() => {
        try {
          process.kill(child, 0);
          // ended but not yet waited for by its new parent still has an id
          return readFileSync(`/proc/${child}/stat`, 'utf8').split(') ')[1]!.startsWith('Z');
        } catch {
          return true;
        }
      });
    },
  );

  it('is ended when the server stops, and is then to be run again', async () => {
    const stop = new AbortController();
    const running = program(temporaryFolder(), 'setInterval(() => {}, 1000)')(BODY, stop.signal);
    setTimeout(() => stop.abort(), 200);
    expect(await running).toMatchObject({ kind: 'again' });
  });
});
