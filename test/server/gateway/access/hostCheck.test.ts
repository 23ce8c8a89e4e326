import { hostname } from 'node:os';
import { describe, expect, it } from 'vitest';
import { createHostCheck, isLoopback } from '../../../../server/gateway/access/hostCheck.ts';

const lets = (check: ReturnType<typeof createHostCheck>, host: string | undefined, origin?: string) =>
  check({ ...(host === undefined ? {} : { host }), ...(origin === undefined ? {} : { origin }) }) === null;

describe('the name a request asks for', () => {
  it('is this machine’s own, where only it can connect', () => {
    const check = createHostCheck('127.0.0.1', []);
    for (const host of ['localhost', 'LOCALHOST:4717', '127.0.0.1:4717', '[::1]:4717'])
      expect(lets(check, host), host).toBe(true);
    for (const host of [
      undefined,
      '',
      'lab.example',
      'lab.example:4717',
      '10.0.0.7',
      'localhost.example',
      '127.0.0.1.example',
      hostname(),
    ])
      expect(lets(check, host), host ?? 'none').toBe(false);
  });

  it('may be any address, this machine’s name, or one it was told, where others can connect', () => {
    const check = createHostCheck('0.0.0.0', ['Stand.Example']);
    for (const host of [
      'localhost',
      '10.0.0.7:4717',
      '[2001:db8::7]:4717',
      `${hostname()}:4717`,
      'stand.example:4717',
    ])
      expect(lets(check, host), host).toBe(true);
    for (const host of [
      undefined,
      '',
      'elsewhere.example',
      'stand.example.elsewhere.example',
      '10.0.0.7.elsewhere.example',
    ])
      expect(lets(check, host), host ?? 'none').toBe(false);
  });
});

describe('the page a request comes from', () => {
  it('is the server’s own, over TLS or not', () => {
    const check = createHostCheck('0.0.0.0', ['stand.example']);
    expect(lets(check, 'stand.example', 'https://stand.example')).toBe(true);
    expect(lets(check, '10.0.0.7:4717', 'http://10.0.0.7:4717')).toBe(true);
    for (const origin of [
      'null',
      '',
      'http://elsewhere.example',
      'http://10.0.0.7:80',
      'http://10.0.0.7:4718',
      'file:///x',
      'ftp://10.0.0.7:4717',
    ])
      expect(lets(check, '10.0.0.7:4717', origin), origin).toBe(false);
  });
});

describe('an address to listen on', () => {
  it('is this machine’s alone when it loops back', () => {
    expect(['127.0.0.1', '127.8.9.1', '::1', 'localhost'].map(isLoopback)).toEqual([true, true, true, true]);
    expect(['0.0.0.0', '::', '10.0.0.7', '127.example', '128.0.0.1'].map(isLoopback)).toEqual([
      false,
      false,
      false,
      false,
      false,
    ]);
  });
});
