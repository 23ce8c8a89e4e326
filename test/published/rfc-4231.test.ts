// HMAC-SHA256 against the test vectors of M. Nystrom, "Identifiers and Test Vectors for HMAC-SHA-224, ..., HMAC-SHA-512",
// RFC 4231 (2005), sections 4.2, 4.3, 4.4 and 4.7: keys, data and digests as printed there.
import { describe, expect, it } from 'vitest';
import { hmacSha256 } from '../../server/gateway/delivery/signature.ts';

const VECTORS: [title: string, key: Uint8Array, data: string, digest: string][] = [
  [
    'test case 1',
    Buffer.alloc(20, 0x0b),
    'Hi There',
    'b0344c61d8db38535ca8afceaf0bf12b881dc200c9833da726e9376c2e32cff7',
  ],
  [
    'test case 2 (a key shorter than the digest)',
    Buffer.from('Jefe'),
    'what do ya want for nothing?',
    '5bdcc146bf60754e6a042426089575c75a003f089d2739839dec58b964ec3843',
  ],
  [
    'test case 6 (a key longer than a block)',
    Buffer.alloc(131, 0xaa),
    'Test Using Larger Than Block-Size Key - Hash Key First',
    '60e431591ee0b67f0d8a26aacbf5b77f8e0bc6213728c5140546040f0ee37f54',
  ],
  [
    'test case 7 (key and data longer than a block)',
    Buffer.alloc(131, 0xaa),
    'This is a test using a larger than block-size key and a larger than block-size data. The key needs to be hashed before being used by the HMAC algorithm.',
    '9b09ffa71b942fcb27635fbcd5b0e944bfdc63644f0713938a7f51535c3a35e2',
  ],
];

describe('HMAC-SHA256 by RFC 4231', () => {
  it.each(VECTORS)('gives the digest of %s', (_, key, data, digest) => {
    expect(Buffer.from(hmacSha256(key, data), 'base64').toString('hex')).toBe(digest);
  });
});
