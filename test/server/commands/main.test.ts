import { spawn } from 'node:child_process';
import { existsSync } from 'node:fs';
import { writeFile } from 'node:fs/promises';
import { createServer } from 'node:net';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { beforeAll, describe, expect, it } from 'vitest';
import { serve, swingModelJson } from '../gateway/harness.ts';
import { temporaryFolder } from '../store/temporaryFolder.ts';

const program = fileURLToPath(new URL('../../../dist/server/commands/main.js', import.meta.url));
beforeAll(() => expect(existsSync(program), 'npm run build makes the program').toBe(true));

function run(...argv: string[]): Promise<{ code: number | null; out: string; err: string }> {
  return new Promise((resolve) => {
    const child = spawn(process.execPath, [program, ...argv]);
    let [out, err] = ['', ''];
    child.stdout.on('data', (data) => (out += data));
    child.stderr.on('data', (data) => (err += data));
    child.on('close', (code) => resolve({ code, out, err }));
  });
}

const csv = (text: string) => {
  const file = join(temporaryFolder(), 'recording.csv');
  return writeFile(file, text).then(() => file);
};

describe('the program', () => {
  it('lists its commands, its version, and the caution', async () => {
    const help = await run('--help');
    expect(help).toMatchObject({ code: 0, err: '' });
    expect(help.out).toMatch(/watch[\s\S]*fit[\s\S]*rehearse[\s\S]*play/);
    expect(help.out).toContain('not a safety function');
    expect((await run('--version')).out).toMatch(/\d+\.\d+\.\d+/);
  });

  it('has an example in the help of each command', async () => {
    for (const command of ['watch', 'fit', 'rehearse', 'play', 'backup', 'restore', 'token']) {
      const help = await run(command, '--help');
      expect(help.code, command).toBe(0);
      expect(help.out, command).toMatch(new RegExp(`example[\\s\\S]*foreshift ${command}`));
    }
  });

  it('answers bad input with one sentence on standard error and exit code 2', async () => {
    const newer = join(temporaryFolder(), 'newer.json');
    const model = JSON.parse(swingModelJson());
    for (const key of Object.keys(model)) if (/version/i.test(key)) model[key] = 1000;
    await writeFile(newer, JSON.stringify(model));
    const file = await csv('time,c\n0,1\n1,2\n');
    const empty = await csv('');
    const wordy = await csv('time,c\n0,1\n1,two\n');
    const to = ['--to', 'ws://127.0.0.1:1/ingest'];
    const asks: [RegExp, string[]][] = [
      [/no command "frobnicate"/, ['frobnicate']],
      [/--listen is 0\.0\.0\.0/, ['watch', '--listen', '0.0.0.0']],
      [/--port is 70000/, ['watch', '--port', '70000']],
      [/--port is "x"/, ['watch', '--port', 'x']],
      [/--model is given alone/, ['watch', '--model', newer]],
      [/cannot be read/, ['watch', '--model', '/nowhere/m.json', '--channel', 'c']],
      [/version/, ['watch', '--model', newer, '--channel', 'c']],
      [/unknown|Unknown/, ['watch', '--frobnicate']],
      [/there is no --to/, ['play', file]],
      [/0 recordings are named/, ['play', ...to]],
      [/--to is "here"/, ['play', file, '--to', 'here']],
      [/--pace is -1/, ['play', file, '--pace=-1', ...to]],
      [/--times is "then"/, ['play', file, '--times', 'then', ...to]],
      [/no channel "d"/, ['play', file, '--channel', 'd', ...to]],
      [/nowhere\.csv/, ['play', '/nowhere.csv', ...to]],
      [/empty|no /, ['play', empty, ...to]],
      [/two/, ['play', wordy, ...to]],
    ];
    const answers = await Promise.all(asks.map(([, argv]) => run(...argv)));
    answers.forEach(({ code, out, err }, i) => {
      const told = asks[i]![1].join(' ');
      expect(code, told).toBe(2);
      expect(out, told).toBe('');
      expect(err, told).toMatch(asks[i]![0]);
      expect(err.trim().split('\n'), told).toHaveLength(1);
    });
  });

  it('says that a port is taken, and how to choose another', async () => {
    const taken = createServer().listen(0, '127.0.0.1');
    await new Promise((resolve) => taken.once('listening', resolve));
    const { port } = taken.address() as { port: number };
    const data = join(temporaryFolder(), 'data');
    const answer = await run('watch', '--no-browser', '--port', String(port), '--data', data);
    taken.close();
    expect(answer.code).toBe(2);
    expect(answer.err).toContain(`port ${port} is taken`);
    expect(answer.err).toContain('--port');
  });

  it('says that settings cannot be used, naming the key', async () => {
    const data = temporaryFolder();
    await writeFile(join(data, 'settings.json'), '{"ingestWindow": 0}');
    const answer = await run('watch', '--no-browser', '--port', '0', '--data', data);
    expect(answer.code).toBe(2);
    expect(answer.err).toContain('ingestWindow');
  });
});

describe('foreshift play', () => {
  it('sends a recording to "NAME, played" and ends with 0 once everything is acknowledged', async () => {
    const { port, hub } = await serve(temporaryFolder());
    const file = await csv(
      `time,dT\n${Array.from({ length: 500 }, (_, i) => `${i * 0.1},${i}`).join('\n')}\n`,
    );
    const to = `ws://127.0.0.1:${port}`;
    const { code, out } = await run('play', file, '--to', to, '--pace', 'max', '--json');
    expect(code).toBe(0);
    expect(JSON.parse(out)).toMatchObject({ channels: ['dT, played'], samples: 500, refused: 0 });
    const { values, times } = await hub.store.samplesFrom('dT, played', 0, 1e6);
    expect([...values]).toEqual(Array.from({ length: 500 }, (_, i) => i));
    // faster than the clock: elapsed time, spaced as it was recorded
    expect([times[0], times[499]]).toEqual([0, expect.closeTo(49.9, 9)]);
  });

  it('ends with 1 when the server would not use something', async () => {
    const { port } = await serve(temporaryFolder());
    const file = await csv('time,c\n0,1\n1,2\n');
    const again = [
      'play',
      file,
      '--to',
      `ws://127.0.0.1:${port}/ingest`,
      '--times',
      'recorded',
      '--pace',
      'max',
    ];
    expect((await run(...again)).code).toBe(0);
    await new Promise((resolve) => setTimeout(resolve, 1200));
    const second = await run(...again);
    expect(second.code).toBe(1);
    expect(second.err).toContain('send later times');
  });
});
