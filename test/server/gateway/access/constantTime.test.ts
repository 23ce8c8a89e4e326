import { createHash } from 'node:crypto';
import { beforeEach, describe, expect, it, vi } from 'vitest';

const compared: [string, string][] = [];
vi.mock('node:crypto', async (load) => {
  const crypto = await load<typeof import('node:crypto')>();
  return {
    ...crypto,
    timingSafeEqual(a: Buffer, b: Buffer) {
      compared.push([a.toString('hex'), b.toString('hex')]);
      return crypto.timingSafeEqual(a, b);
    },
  };
});
const { tokenFor } = await import('../../../../server/gateway/access/accessTokens.ts');

const hash = (text: string) => createHash('sha256').update(text).digest('hex');
const tokens = ['one', 'two', 'three'].map((name) => ({
  name,
  role: 'viewer' as const,
  channels: null,
  sha256: hash(name),
  createdAt: '2026-05-01T08:00:00Z',
}));
beforeEach(() => compared.splice(0));

describe('the comparing of tokens', () => {
  it.each(['one', 'three', 'none', '', 'x'.repeat(5000)])(
    'is of whole hashes, in constant time, with every token there is: %s',
    (given) => {
      expect(tokenFor(tokens, given)?.name ?? 'none').toBe(
        tokens.some(({ name }) => name === given) ? given : 'none',
      );
      expect(compared.map(([, kept]) => kept)).toEqual(tokens.map(({ sha256 }) => sha256));
      for (const [asked, kept] of compared) expect([asked.length, kept.length]).toEqual([64, 64]);
    },
  );
});
