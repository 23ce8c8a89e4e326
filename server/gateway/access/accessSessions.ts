import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { z } from 'zod';
import { digestOf, newSecret, type TokenRecord } from './accessTokens.ts';
import { writePrivately } from './privateFile.ts';

/** Beside the tokens: the pages that are signed in, by the hashes of their cookies, so that a restart signs nobody out. */
export const SESSIONS_FILE = 'access-sessions.json';

/** A page signs in once a month; so many can be signed in, then the oldest is forgotten. */
export const SESSION_SECONDS = 30 * 86_400;
const MOST_SESSIONS = 1000;

const Session = z.strictObject({
  sha256: z.string(),
  /** hash of the token it was opened with */
  token: z.string(),
  /** server clock, Unix seconds */
  expires: z.number(),
});
type Session = z.infer<typeof Session>;
const SessionsFile = z.strictObject({ version: z.literal(1), sessions: z.array(Session) });

/** Pages that are signed in. */
export interface Sessions {
  /** the cookie's secret */
  open(token: TokenRecord): string;
  /** hash of the token a cookie stands for; null when it stands for none any more */
  tokenOf(secret: string): string | null;
  close(secret: string): void;
}

function read(file: string): Session[] {
  try {
    return SessionsFile.parse(JSON.parse(readFileSync(file, 'utf8'))).sessions;
  } catch {
    // whoever was signed in signs in again
    return [];
  }
}

/**
 * The sessions of a data folder.
 *
 * @param now    server clock, Unix seconds
 * @param failed told when they could not be written: they last until the server stops, then
 */
export function createSessions(folder: string, now: () => number, failed: (text: string) => void): Sessions {
  const file = join(folder, SESSIONS_FILE);
  const sessions = new Map(read(file).map((session) => [session.sha256, session]));
  const keep = () => {
    for (const [key, { expires }] of sessions)
      if (expires <= now() || sessions.size > MOST_SESSIONS) sessions.delete(key);
    try {
      writePrivately(file, `${JSON.stringify({ version: 1, sessions: [...sessions.values()] })}\n`);
    } catch (error) {
      failed(`who is signed in is not being stored: ${(error as Error).message}`);
    }
  };
  return {
    open(token) {
      const secret = newSecret();
      const sha256 = digestOf(secret).toString('hex');
      sessions.set(sha256, { sha256, token: token.sha256, expires: now() + SESSION_SECONDS });
      keep();
      return secret;
    },
    tokenOf(secret) {
      // looked up by its hash: a guess says nothing about the secrets themselves
      const session = sessions.get(digestOf(secret).toString('hex'));
      return session === undefined || session.expires <= now() ? null : session.token;
    },
    close(secret) {
      if (sessions.delete(digestOf(secret).toString('hex'))) keep();
    },
  };
}
