import { execFileSync, spawnSync } from 'node:child_process';
import { readFileSync } from 'node:fs';
import { get } from 'node:https';
import { join } from 'node:path';
import { connect as connectTls } from 'node:tls';
import { describe, expect, it } from 'vitest';
import { WebSocket } from 'ws';
import { createAccess } from '../../../server/gateway/access/access.ts';
import { createToken } from '../../../server/gateway/access/accessTokens.ts';
import { temporaryFolder } from '../store/temporaryFolder.ts';
import { serve } from './harness.ts';

const hasOpenssl = spawnSync('openssl', ['version']).status === 0;

function certificateIn(folder: string) {
  const [certificate, key] = [join(folder, 'certificate.pem'), join(folder, 'key.pem')];
  const made = ['-x509', '-newkey', 'ec', '-pkeyopt', 'ec_paramgen_curve:prime256v1', '-noenc', '-days', '1'];
  const names = ['-subj', '/CN=localhost', '-addext', 'subjectAltName=DNS:localhost,IP:127.0.0.1'];
  execFileSync('openssl', ['req', ...made, ...names, '-keyout', key, '-out', certificate], {
    stdio: 'ignore',
  });
  return { certificate: readFileSync(certificate), key: readFileSync(key) };
}

const statusOf = (options: object) =>
  new Promise<number | string>((resolve) => {
    get({ host: '127.0.0.1', path: '/health', ...options }, (response) => {
      response.resume();
      resolve(response.statusCode!);
    }).on('error', (error: NodeJS.ErrnoException) => resolve(error.code ?? error.message));
  });

describe.skipIf(!hasOpenssl)('over TLS, with a certificate that openssl made', () => {
  it('answers who trusts the certificate, in TLS 1.2 and 1.3 alone, and nobody in the clear', async () => {
    const folder = temporaryFolder();
    const tls = certificateIn(folder);
    const { port } = await serve(join(folder, 'data'), {}, { tls });
    expect(await statusOf({ port, ca: tls.certificate })).toBe(200);
    expect(await statusOf({ port })).toBe('DEPTH_ZERO_SELF_SIGNED_CERT');
    for (const [version, answered] of [
      ['TLSv1.3', true],
      ['TLSv1.2', true],
      ['TLSv1.1', false],
    ] as const)
      expect(await handshakes(port, version, tls.certificate), version).toBe(answered);
    await expect(fetch(`http://127.0.0.1:${port}/health`)).rejects.toThrow();
  });

  it('takes producers by wss with their token, marks the cookie Secure, and feeds itself beside', async () => {
    const folder = temporaryFolder();
    const data = join(folder, 'data');
    const tls = certificateIn(folder);
    const token = createToken(data, { name: 'rig', role: 'producer', channels: null }, new Date());
    const access = createAccess({
      folder: data,
      now: () => Date.now() / 1000,
      secure: true,
      warn: expect.unreachable,
    });
    const server = await serve(data, {}, { tls, access });
    const feeding = (address: string, shown: string) =>
      new Promise<string>((resolve) => {
        const socket = new WebSocket(address, {
          ca: tls.certificate,
          headers: { authorization: `Bearer ${shown}` },
        });
        socket.on('open', () =>
          socket.send(
            JSON.stringify({ hello: 1, run: address, channels: [{ channel: `c ${shown === token}` }] }),
          ),
        );
        socket.on('message', (reply) => {
          resolve(String(reply));
          socket.terminate();
        });
        socket.on('error', (error) => resolve(error.message));
      });
    expect(await feeding(`wss://127.0.0.1:${server.port}/ingest`, token)).toContain('"resume":0');
    expect(server.ownIngest).toMatch(/^ws:\/\/127\.0\.0\.1:\d+\/ingest$/);
    expect(await feeding(server.ownIngest, server.ownToken!)).toContain('"resume":0');
    expect(await feeding(server.ownIngest, 'another')).toContain('401');
  });
});

/** Whether a handshake of one version comes about. */
function handshakes(port: number, version: 'TLSv1.1' | 'TLSv1.2' | 'TLSv1.3', ca: Buffer): Promise<boolean> {
  return new Promise((resolve) => {
    const socket = connectTls(
      {
        port,
        host: '127.0.0.1',
        ca,
        minVersion: version,
        maxVersion: version,
        ciphers: 'DEFAULT:@SECLEVEL=0',
      },
      () => {
        resolve(true);
        socket.destroy();
      },
    );
    socket.on('error', () => resolve(false));
  });
}
