import { chmodSync, readFileSync, statSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import {
  createSessions,
  SESSION_SECONDS,
  SESSIONS_FILE,
} from '../../../../server/gateway/access/accessSessions.ts';
import {
  createToken,
  createTokenList,
  digestOf,
  readTokens,
  TOKENS_FILE,
  tokenFor,
  withdrawToken,
} from '../../../../server/gateway/access/accessTokens.ts';
import { temporaryFolder } from '../../store/temporaryFolder.ts';

const NOW = new Date('2026-05-01T08:00:00Z');
const codeOf = (attempt: () => unknown): unknown => {
  try {
    attempt();
  } catch (error) {
    return (error as { code?: unknown }).code;
  }
  return null;
};
const viewer = (name: string) => ({ name, role: 'viewer' as const, channels: null });

describe('the hash a token is kept as', () => {
  it('is SHA-256: the example "abc" of FIPS 180-4 (NIST, SHA256.pdf)', () => {
    expect(digestOf('abc').toString('hex')).toBe(
      'ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad',
    );
  });
});

describe('tokens in a data folder', () => {
  it('are kept as hashes in a file that its owner alone can read', () => {
    const folder = temporaryFolder();
    const secret = createToken(folder, viewer('hall'), NOW);
    const file = join(folder, TOKENS_FILE);
    expect(Buffer.from(secret, 'base64url')).toHaveLength(32);
    expect(readFileSync(file, 'utf8')).not.toContain(secret);
    expect(readFileSync(file, 'utf8')).toContain(digestOf(secret).toString('hex'));
    expect(statSync(file).mode & 0o777).toBe(0o600);
  });

  it('let in whoever has one, until it is withdrawn', () => {
    const folder = temporaryFolder();
    const secrets = ['hall', 'door', 'cellar'].map((name) => createToken(folder, viewer(name), NOW));
    expect(new Set(secrets).size).toBe(3);
    expect(secrets.map((secret) => tokenFor(readTokens(folder), secret)?.name)).toEqual([
      'hall',
      'door',
      'cellar',
    ]);
    withdrawToken(folder, 'door');
    expect(secrets.map((secret) => tokenFor(readTokens(folder), secret)?.name)).toEqual([
      'hall',
      undefined,
      'cellar',
    ]);
  });

  it('let nobody in by anything like one', () => {
    const folder = temporaryFolder();
    const secret = createToken(folder, viewer('hall'), NOW);
    const hash = digestOf(secret).toString('hex');
    for (const guess of [
      '',
      secret.slice(1),
      `${secret} `,
      secret.toUpperCase(),
      hash,
      `${secret}${'x'.repeat(10_000)}`,
    ])
      expect(tokenFor(readTokens(folder), guess), guess.slice(0, 60)).toBeNull();
  });

  it('refuse a name twice, a name that is none, and channels of anybody but a producer', () => {
    const folder = temporaryFolder();
    createToken(folder, viewer('hall'), NOW);
    expect(codeOf(() => createToken(folder, viewer('hall'), NOW))).toBe('TOKEN_EXISTS');
    expect(codeOf(() => createToken(folder, viewer('../x'), NOW))).toBe('BAD_TOKEN');
    expect(codeOf(() => createToken(folder, { ...viewer('door'), channels: ['a'] }, NOW))).toBe(
      'CHANNELS_OF_A_PRODUCER',
    );
    expect(codeOf(() => withdrawToken(folder, 'door'))).toBe('NO_SUCH_TOKEN');
    expect(readTokens(folder)).toHaveLength(1);
  });

  it('are not believed when others could have written them, or when they are damaged', () => {
    const folder = temporaryFolder();
    createToken(folder, viewer('hall'), NOW);
    const file = join(folder, TOKENS_FILE);
    chmodSync(file, 0o666);
    expect(codeOf(() => readTokens(folder))).toBe('BAD_ACCESS_FILE');
    chmodSync(file, 0o600);
    expect(readTokens(folder)).toHaveLength(1);
    for (const text of ['{', '{}', '{"version":2,"tokens":[]}', '{"version":1,"tokens":[{"name":"x"}]}']) {
      writeFileSync(file, text);
      expect(
        codeOf(() => readTokens(folder)),
        text,
      ).toBe('BAD_ACCESS_FILE');
    }
  });

  it('are read again when the file has changed, and let nobody in while it cannot be used', () => {
    const folder = temporaryFolder();
    const told: string[] = [];
    const list = createTokenList(folder, (text) => told.push(text));
    expect(list()).toEqual([]);
    createToken(folder, viewer('hall'), NOW);
    expect(list().map(({ name }) => name)).toEqual(['hall']);
    writeFileSync(join(folder, TOKENS_FILE), 'nonsense');
    expect([list(), list()]).toEqual([[], []]);
    expect(told).toHaveLength(1);
  });
});

describe('pages that are signed in', () => {
  it('stay so over a restart of the server, are kept as hashes, and end after their time or when they sign out', () => {
    const folder = temporaryFolder();
    createToken(folder, viewer('hall'), NOW);
    const [token] = readTokens(folder);
    let now = 1e9;
    const open = () => createSessions(folder, () => now, expect.unreachable);
    const before = open();
    const [first, second] = [before.open(token!), before.open(token!)];
    expect(readFileSync(join(folder, SESSIONS_FILE), 'utf8')).not.toMatch(new RegExp(`${first}|${second}`));
    expect(statSync(join(folder, SESSIONS_FILE)).mode & 0o777).toBe(0o600);
    const after = open();
    expect(after.tokenOf(first)).toBe(token!.sha256);
    after.close(first);
    expect([after.tokenOf(first), after.tokenOf(second)]).toEqual([null, token!.sha256]);
    expect(open().tokenOf(first)).toBeNull();
    now += SESSION_SECONDS;
    expect(after.tokenOf(second)).toBeNull();
  });
});
