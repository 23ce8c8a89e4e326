// A. Backman, J. Richer, M. Sporny, "HTTP Message Signatures", RFC 9421 (2024): the key of appendix B.1.5, the base and
// the signature of appendix B.2.5. R. Polli, L. Pardue, "Digest Fields", RFC 9530 (2024), appendix B.1: the digest of
// {"hello": "world"} with its line feed.
import { describe, expect, it } from 'vitest';
import { contentDigest, hmacSha256, signatureBase } from '../../server/gateway/delivery/signature.ts';

const SHARED_SECRET = Buffer.from(
  'uzvJfB4u3N0Jy4T7NZ75MDVcr8zSTInedJtkgcu46YW4XByzNJjxBdtjUkdJPBtbmHhIDi6pcl8jsasjlTMtDQ==',
  'base64',
);

describe('HTTP message signatures by RFC 9421', () => {
  const base = signatureBase(
    [
      ['date', 'Tue, 20 Apr 2021 02:07:55 GMT'],
      ['@authority', 'example.com'],
      ['content-type', 'application/json'],
    ],
    '("date" "@authority" "content-type");created=1618884473;keyid="test-shared-secret"',
  );

  it('are over the base of B.2.5, line for line', () => {
    expect(base).toBe(
      [
        '"date": Tue, 20 Apr 2021 02:07:55 GMT',
        '"@authority": example.com',
        '"content-type": application/json',
        '"@signature-params": ("date" "@authority" "content-type");created=1618884473;keyid="test-shared-secret"',
      ].join('\n'),
    );
  });

  it('have the value of B.2.5 under the shared secret of B.1.5', () => {
    expect(hmacSha256(SHARED_SECRET, base)).toBe('pxcQw6G3AjtMBQjwo8XzkZf/bws5LelbaMk5rGIGtE8=');
  });
});

describe('the content digest by RFC 9530', () => {
  it('is that of appendix B.1', () => {
    expect(contentDigest('{"hello": "world"}\n')).toBe(
      'sha-256=:RK/0qy18MlBSVnWgjwz6lZEWjP/lF5HF9bvEF8FabDg=:',
    );
  });
});
