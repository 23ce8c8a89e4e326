import { spawn } from 'node:child_process';
import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { describe, expect, it } from 'vitest';
import { asksForTokens, logChoice, tlsChoice } from '../../../server/commands/watchOptions.ts';
import { createToken } from '../../../server/gateway/access/accessTokens.ts';
import { temporaryFolder } from '../store/temporaryFolder.ts';

const program = fileURLToPath(new URL('../../../dist/server/commands/main.js', import.meta.url));

function run(...argv: string[]): Promise<{ code: number | null; out: string; err: string }> {
  return new Promise((resolve) => {
    const child = spawn(process.execPath, [program, ...argv]);
    let [out, err] = ['', ''];
    child.stdout.on('data', (data) => (out += data));
    child.stderr.on('data', (data) => (err += data));
    child.on('close', (code) => resolve({ code, out, err }));
  });
}

/** Starts a server, reads where it is, and stops it. */
function started(...argv: string[]): Promise<{ out: string; err: string; status: number | null }> {
  return new Promise((resolve, reject) => {
    const child = spawn(process.execPath, [program, 'watch', '--no-browser', '--port', '0', ...argv]);
    let [out, err, status] = ['', '', null as number | null];
    child.stderr.on('data', (data) => (err += data));
    child.stdout.on('data', async (data) => {
      out += data;
      const port = /:(\d+)\/ingest/.exec(out)?.[1];
      if (port === undefined || status !== null) return;
      status = 0;
      status = (await fetch(`http://127.0.0.1:${port}/api/channels`)).status;
      child.kill('SIGTERM');
    });
    child.on('error', reject);
    child.on('close', () => resolve({ out, err, status }));
  });
}

describe('foreshift token', () => {
  it('creates, lists and withdraws tokens, and shows each once', async () => {
    const data = join(temporaryFolder(), 'data');
    const where = ['--data', data];
    const created = await run(
      'token',
      'create',
      'rig 2',
      '--role',
      'producer',
      '--channel',
      'loop 1, dT',
      ...where,
    );
    const token = created.out.split('\n')[0]!;
    expect(token).toMatch(/^[\w-]{43}$/);
    expect(created).toMatchObject({ code: 0, err: '' });
    const json = JSON.parse(
      (await run('token', 'create', 'desk', '--role', 'operator', '--json', ...where)).out,
    );
    expect(json).toEqual({
      name: 'desk',
      role: 'operator',
      channels: null,
      token: expect.stringMatching(/^[\w-]{43}$/),
    });
    const listed = await run('token', 'list', ...where);
    expect(listed.out).toMatch(/producer .*rig 2 {2}\(loop 1, dT\)\noperator .*desk\n/);
    const kept = readFileSync(join(data, 'access.json'), 'utf8');
    for (const secret of [token, json.token]) expect(listed.out + kept).not.toContain(secret);
    expect((await run('token', 'withdraw', 'rig 2', ...where)).out).toContain('"rig 2" is withdrawn');
    expect(
      JSON.parse((await run('token', 'list', '--json', ...where)).out).tokens.map(
        ({ name }: { name: string }) => name,
      ),
    ).toEqual(['desk']);
  });

  it('answers bad input with a sentence that says what to do, and 2', async () => {
    const data = ['--data', temporaryFolder()];
    for (const [expected, argv] of [
      [/expected create, list or withdraw/, ['token']],
      [/no name given/, ['token', 'create', '--role', 'viewer']],
      [/expected operator, viewer or producer/, ['token', 'create', 'x', '--role', 'king']],
      [/only a producer's can be bound/, ['token', 'create', 'x', '--role', 'viewer', '--channel', 'c']],
      [/there is no token "x"/, ['token', 'withdraw', 'x']],
    ] as [RegExp, string[]][]) {
      const { code, err } = await run(...argv, ...data);
      expect([code, err.trim().split('\n').length], err).toEqual([2, 1]);
      expect(err).toMatch(expected);
    }
    expect((await run('token', '--help')).out).toMatch(/example[\s\S]*foreshift token create/);
  });
});

describe('listening wider', () => {
  it('is refused without a token, in a sentence with the command that makes one', async () => {
    const { code, err } = await run('watch', '--listen', '0.0.0.0', '--data', temporaryFolder());
    expect([code, err]).toEqual([2, expect.stringMatching(/^foreshift watch: --listen is 0\.0\.0\.0/)]);
    for (const listen of ['0.0.0.0', '::', '192.0.2.7'])
      expect(() => asksForTokens(listen, false, temporaryFolder())).toThrow(
        /other machines could connect, and there is no token yet .*foreshift token create NAME --role operator/,
      );
  });

  it('asks for tokens, and says that nothing is encrypted', async () => {
    const data = temporaryFolder();
    await run('token', 'create', 'desk', '--role', 'operator', '--data', data);
    const { out, err, status } = await started('--listen', '0.0.0.0', '--data', data);
    expect(status).toBe(401);
    expect(out).toContain('tokens     asked for');
    expect(err).toMatch(/unencrypted.*--certificate/);
    expect((await started('--data', data)).status).toBe(200);
    expect((await started('--tokens', '--data', data)).status).toBe(401);
  });

  it('names what is wrong with an address', async () => {
    const { code, err } = await run(
      'watch',
      '--tokens',
      '--listen',
      '127.0.0.1',
      '--data',
      temporaryFolder(),
    );
    expect([code, err]).toEqual([
      2,
      expect.stringMatching(/--tokens asks for tokens, and there is none yet/),
    ]);
    const data = temporaryFolder();
    createToken(data, { name: 'desk', role: 'operator', channels: null }, new Date());
    const away = await run('watch', '--no-browser', '--data', data, '--listen', '192.0.2.7', '--port', '0');
    expect([away.code, away.err]).toEqual([
      2,
      expect.stringMatching(/192\.0\.2\.7, which is no address of this machine/),
    ]);
  });

  it('names what is wrong with a certificate or a log', async () => {
    const folder = temporaryFolder();
    await expect(tlsChoice('x.pem', undefined)).rejects.toThrow(/--certificate is given alone/);
    await expect(tlsChoice('x.pem', 'y.pem')).rejects.toThrow(/x\.pem cannot be read/);
    await expect(tlsChoice(program, program)).rejects.toThrow(/cannot be used together/);
    await expect(logChoice('xml', undefined)).rejects.toThrow(/expected sentences or json/);
    await expect(logChoice('json', join(folder, 'none', 'log'))).rejects.toThrow(/cannot be written/);
    expect(await tlsChoice(undefined, undefined)).toBeNull();
  });

  it('logs as JSON lines into a file, from the start to the stop, without the token', async () => {
    const data = temporaryFolder();
    const file = join(data, 'server.log');
    await started('--log', 'json', '--log-to', file, '--data', data);
    const lines = readFileSync(file, 'utf8')
      .trim()
      .split('\n')
      .map((line) => JSON.parse(line));
    expect(lines.map(({ text }) => text).join('\n')).toMatch(/foreshift [\d.]+ started[\s\S]*stopped/);
    for (const line of lines)
      expect(line).toMatchObject({
        time: expect.stringMatching(/^\d{4}-.*Z$/),
        level: 'notice',
        event: expect.any(String),
        text: expect.any(String),
      });
  });
});
