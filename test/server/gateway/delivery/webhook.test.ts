import { createHash, createHmac } from 'node:crypto';
import { describe, expect, it } from 'vitest';
import { createWebhook } from '../../../../server/gateway/delivery/webhook.ts';
import { receiver } from './receiver.ts';

const never = new AbortController().signal;
const KEY = Buffer.from('a secret of more than sixteen bytes');
const BODY = '{"specversion":"1.0","id":"loop/1/issued"}';

const webhook = (url: string, timeLimit = 5, key: Uint8Array | null = null) =>
  createWebhook({ url, name: 'bench lamp', key, timeLimit, now: () => 1_796_100_000.7 });

describe('a webhook', () => {
  it('posts the body byte for byte as a CloudEvent in structured mode, and takes any 2xx for received', async () => {
    const { url, came } = await receiver((response) => response.writeHead(202).end('thank you'));
    expect(await webhook(url)(BODY, never)).toEqual({ kind: 'delivered', text: 'answered 202' });
    expect(came).toHaveLength(1);
    expect(came[0]!.body).toBe(BODY);
    expect(came[0]!.headers['content-type']).toBe('application/cloudevents+json; charset=utf-8');
    expect(came[0]!.headers).not.toHaveProperty('signature');
  });

  it('signs what a receiver can check with what it has: key, headers and body', async () => {
    const { url, port, came } = await receiver();
    await webhook(url, 5, KEY)(BODY, never);
    const { headers, body } = came[0]!;
    // checked as the receiver would by RFC 9421, section 3.2, written out by hand
    expect(headers['content-digest']).toBe(`sha-256=:${createHash('sha256').update(body).digest('base64')}:`);
    const parameters = String(headers['signature-input']).replace(/^warning=/, '');
    expect(parameters).toBe(
      '("@method" "@authority" "@path" "content-type" "content-digest");created=1796100000;keyid="bench lamp";alg="hmac-sha256"',
    );
    const base = `"@method": POST\n"@authority": 127.0.0.1:${port}\n"@path": /warnings\n"content-type": ${headers['content-type']}\n"content-digest": ${headers['content-digest']}\n"@signature-params": ${parameters}`;
    expect(headers.signature).toBe(`warning=:${createHmac('sha256', KEY).update(base).digest('base64')}:`);
  });

  it.each([
    [500, 'again'],
    [503, 'again'],
    [429, 'again'],
    [408, 'again'],
    [400, 'refused'],
    [401, 'refused'],
    [410, 'refused'],
  ])('takes a %i as: %s', async (status, kind) => {
    const { url } = await receiver((response) => response.writeHead(status).end());
    expect(await webhook(url)(BODY, never)).toMatchObject({ kind, text: `answered ${status}` });
  });

  it('hears how long a receiver asks it to wait', async () => {
    const { url } = await receiver((response) => response.writeHead(503, { 'retry-after': '7' }).end());
    expect(await webhook(url)(BODY, never)).toMatchObject({ kind: 'again', after: 7 });
  });

  it('tries again what cannot be reached, and says why', async () => {
    const { url, close } = await receiver();
    await close();
    const came = await webhook(url)(BODY, never);
    expect(came).toMatchObject({ kind: 'again', text: expect.stringContaining('ECONNREFUSED') });
  });

  it('waits no longer than its time limit, for the answer’s head or for its body', async () => {
    const dumb = await receiver(() => {});
    const slow = await receiver((response) => response.writeHead(200).write('and so on'));
    for (const { url } of [dumb, slow]) {
      const began = performance.now();
      expect(await webhook(url, 0.3)(BODY, never)).toMatchObject({
        kind: 'again',
        text: 'did not answer within 0.3 s',
      });
      expect(performance.now() - began).toBeLessThan(2000);
    }
  });

  it('reads only the beginning of an endless answer', async () => {
    let sent = 0;
    const { url } = await receiver((response) => {
      response.writeHead(200);
      const part = Buffer.alloc(65_536);
      const pour = () => {
        while (!response.destroyed && response.write(part)) sent += part.length;
        if (!response.destroyed) response.once('drain', pour);
      };
      pour();
    });
    expect(await webhook(url, 5)(BODY, never)).toMatchObject({ kind: 'delivered' });
    // what the sockets' own buffers hold may be on its way
    expect(sent).toBeLessThan(32 * 1024 * 1024);
  });

  it('follows a 307 on its own origin, signed for where it leads', async () => {
    const { url, came } = await receiver((response, { path }) =>
      path === '/warnings'
        ? response.writeHead(307, { location: '/moved?x=1' }).end()
        : response.writeHead(204).end(),
    );
    expect(await webhook(url, 5, KEY)(BODY, never)).toMatchObject({ kind: 'delivered' });
    expect(came.map(({ path }) => path)).toEqual(['/warnings', '/moved?x=1']);
    expect(came[1]!.body).toBe(BODY);
    expect(came[1]!.headers.signature).not.toBe(came[0]!.headers.signature);
  });

  it('sends nothing to another origin, whatever a redirect says', async () => {
    const elsewhere = await receiver();
    for (const status of [301, 302, 303, 307, 308]) {
      const { url } = await receiver((response) =>
        response.writeHead(status, { location: elsewhere.url }).end(),
      );
      expect(await webhook(url, 5, KEY)(BODY, never)).toMatchObject({
        kind: 'refused',
        text: expect.stringContaining(`answered ${status}`),
      });
    }
    expect(elsewhere.came).toEqual([]);
  });

  it('gives up a circle of redirects', async () => {
    const { url, came } = await receiver((response) =>
      response.writeHead(308, { location: '/warnings' }).end(),
    );
    expect(await webhook(url)(BODY, never)).toMatchObject({ kind: 'refused' });
    expect(came.length).toBeLessThan(6);
  });
});
