import { createHash, createHmac } from 'node:crypto';

/** A part of a message that is signed: its name and value as RFC 9421 writes them (section 2). */
export type Component = readonly [name: string, value: string];

/** The body's digest as a header's value (RFC 9530, section 2). */
export const contentDigest = (body: string): string =>
  `sha-256=:${createHash('sha256').update(body, 'utf8').digest('base64')}:`;

/** What is signed: each component on a line, the parameters last (RFC 9421, section 2.5). */
export const signatureBase = (components: readonly Component[], parameters: string): string =>
  [...components, ['@signature-params', parameters] as const]
    .map(([name, value]) => `"${name}": ${value}`)
    .join('\n');

/** HMAC-SHA256 of a signature base (RFC 9421, section 3.3.3; RFC 2104), base64. */
export const hmacSha256 = (key: Uint8Array, base: string): string =>
  createHmac('sha256', key).update(base, 'utf8').digest('base64');

/** What a request is signed with. */
export interface Signing {
  key: Uint8Array;
  /** by which the receiver knows the key; no quotes or backslashes */
  keyId: string;
  /** Unix seconds; a receiver that refuses old ones cannot be told the same twice by somebody else */
  created: number;
}

/**
 * The headers that sign a POST: method, authority, path, type and digest of the body, and when.
 *
 * @see RFC 9421, sections 2.5, 3.1 and 4
 */
export function signedHeaders(url: URL, type: string, body: string, signing: Signing) {
  const digest = contentDigest(body);
  const components: Component[] = [
    ['@method', 'POST'],
    ['@authority', url.host],
    ['@path', url.pathname],
    ['content-type', type],
    ['content-digest', digest],
  ];
  const names = components.map(([name]) => `"${name}"`).join(' ');
  const created = Math.floor(signing.created);
  const parameters = `(${names});created=${created};keyid="${signing.keyId}";alg="hmac-sha256"`;
  return {
    'Content-Digest': digest,
    'Signature-Input': `warning=${parameters}`,
    Signature: `warning=:${hmacSha256(signing.key, signatureBase(components, parameters))}:`,
  };
}
