import { createHash, randomBytes, timingSafeEqual } from 'node:crypto';
import { readFileSync, statSync } from 'node:fs';
import { join } from 'node:path';
import { z } from 'zod';
import { ChannelName } from '../../../shared-types/channel.ts';
import { InputError } from '../../signal/inputError.ts';
import { complaint } from '../complaint.ts';
import { writePrivately } from './privateFile.ts';

/** In the data folder, readable by its owner alone. */
export const TOKENS_FILE = 'access.json';

/** 256 bits of chance: far beyond guessing, so that one round of SHA-256 is enough to keep (NIST SP 800-63B, 5.1.2.2). */
const TOKEN_BYTES = 32;
/** nothing longer is looked at */
const LONGEST_TOKEN = 200;
const WRITABLE_BY_OTHERS = 0o022;

const TokenRecord = z.strictObject({
  name: z.string().regex(/^[\p{L}\p{N}][\p{L}\p{N} ._,+@-]{0,79}$/u, {
    message:
      'a token’s name is 1 to 80 letters, digits, spaces or any of . _ , + @ - and begins with a letter',
  }),
  role: z.enum(['operator', 'viewer', 'producer']),
  /** what a producer may feed; null: any channel */
  channels: z.array(ChannelName).min(1).nullable(),
  sha256: z.string().regex(/^[0-9a-f]{64}$/),
  /** RFC 3339 */
  createdAt: z.string(),
});
/** A token as it is kept: never itself, only its hash. */
export type TokenRecord = z.infer<typeof TokenRecord>;
const TokensFile = z.strictObject({ version: z.literal(1), tokens: z.array(TokenRecord).max(10_000) });

export type NewToken = Pick<TokenRecord, 'name' | 'role' | 'channels'>;

/** SHA-256 of a secret. */
export const digestOf = (secret: string): Buffer => createHash('sha256').update(secret).digest();

/** A new secret, 43 characters that need no quoting anywhere. */
export const newSecret = (): string => randomBytes(TOKEN_BYTES).toString('base64url');

/**
 * The tokens of a data folder; none where there is no file.
 *
 * @throws InputError BAD_ACCESS_FILE when it cannot be used, or others than its owner could have written it
 */
export function readTokens(folder: string): TokenRecord[] {
  const file = join(folder, TOKENS_FILE);
  let text: string;
  try {
    text = readFileSync(file, 'utf8');
  } catch (error) {
    const { code } = error as NodeJS.ErrnoException;
    if (code === 'ENOENT' || code === 'ENOTDIR') return [];
    throw new InputError('BAD_ACCESS_FILE', `${file} cannot be read (${code}); make it yours, with mode 600`);
  }
  if (process.platform !== 'win32' && (statSync(file).mode & WRITABLE_BY_OTHERS) !== 0)
    throw new InputError(
      'BAD_ACCESS_FILE',
      `${file} can be written by others than its owner; look it through, then chmod 600 it`,
    );
  return parseTokens(file, text);
}

function parseTokens(file: string, text: string): TokenRecord[] {
  let parsed: unknown;
  try {
    parsed = JSON.parse(text);
  } catch (error) {
    throw new InputError(
      'BAD_ACCESS_FILE',
      `${file} is not JSON: ${(error as Error).message}; remove it and create the tokens anew`,
    );
  }
  const checked = TokensFile.safeParse(parsed);
  if (checked.success) return checked.data.tokens;
  throw new InputError(
    'BAD_ACCESS_FILE',
    `${file} cannot be used: ${complaint(checked.error)}; correct it, or remove it and create the tokens anew`,
  );
}

const write = (folder: string, tokens: TokenRecord[]): void =>
  writePrivately(join(folder, TOKENS_FILE), `${JSON.stringify({ version: 1, tokens }, null, 2)}\n`);

/**
 * Adds a token and returns it: the only time it is seen.
 *
 * @throws InputError when the name is taken or cannot be one, or the role and the channels do not go together
 */
export function createToken(folder: string, wanted: NewToken, now: Date): string {
  const tokens = readTokens(folder);
  if (tokens.some(({ name }) => name === wanted.name))
    throw new InputError(
      'TOKEN_EXISTS',
      `there is a token named "${wanted.name}" already; withdraw it first, or choose another name`,
    );
  if (wanted.channels !== null && wanted.role !== 'producer')
    throw new InputError(
      'CHANNELS_OF_A_PRODUCER',
      `channels are named for a token of role ${wanted.role}; only a producer's can be bound to channels`,
    );
  const secret = newSecret();
  const checked = TokenRecord.safeParse({
    ...wanted,
    sha256: digestOf(secret).toString('hex'),
    createdAt: now.toISOString(),
  });
  if (!checked.success)
    throw new InputError('BAD_TOKEN', `the token cannot be made: ${complaint(checked.error)}`);
  write(folder, [...tokens, checked.data]);
  return secret;
}

/**
 * Takes a token back: it opens nothing any more, and whoever is in by it is put out.
 *
 * @throws InputError NO_SUCH_TOKEN
 */
export function withdrawToken(folder: string, name: string): void {
  const tokens = readTokens(folder);
  const left = tokens.filter((token) => token.name !== name);
  if (left.length === tokens.length) {
    const names = tokens.map((token) => `"${token.name}"`).join(', ');
    throw new InputError(
      'NO_SUCH_TOKEN',
      `there is no token "${name}"; ${names === '' ? 'there are none at all' : `there are ${names}`}`,
    );
  }
  write(folder, left);
}

/**
 * The token that was given, or null. Hashes are compared, in constant time, and always with all of them: how long it
 * takes tells neither how much of a guess was right nor whose token it resembles.
 */
export function tokenFor(tokens: readonly TokenRecord[], given: string): TokenRecord | null {
  const digest = digestOf(given.slice(0, LONGEST_TOKEN));
  let found: TokenRecord | null = null;
  for (const token of tokens) if (timingSafeEqual(digest, Buffer.from(token.sha256, 'hex'))) found = token;
  return given.length > LONGEST_TOKEN ? null : found;
}

/** The tokens of a folder, read again whenever the file has changed, so that a running server follows the command. */
export function createTokenList(folder: string, failed: (text: string) => void): () => TokenRecord[] {
  let seen = '';
  let tokens: TokenRecord[] = [];
  const stamp = (): string => {
    const found = statSync(join(folder, TOKENS_FILE), { throwIfNoEntry: false });
    return found === undefined ? 'none' : `${found.ino} ${found.mtimeMs} ${found.size} ${found.mode}`;
  };
  return () => {
    const now = stamp();
    if (now === seen) return tokens;
    seen = now;
    try {
      tokens = readTokens(folder);
    } catch (error) {
      // nobody new gets in by a file that cannot be trusted, and nobody stays in by it
      tokens = [];
      failed((error as Error).message);
    }
    return tokens;
  };
}
