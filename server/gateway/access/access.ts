import { timingSafeEqual } from 'node:crypto';
import type { IncomingMessage } from 'node:http';
import type { Role } from '../../../shared-types/access.ts';
import { createSessions, SESSION_SECONDS } from './accessSessions.ts';
import { createTokenList, digestOf, newSecret, type TokenRecord, tokenFor } from './accessTokens.ts';
import { createFailures } from './failures.ts';

/** Who is asking. */
export interface Identity {
  /** the token's name; '' where no tokens are asked for */
  name: string;
  role: Role | 'everything';
  /** what it may feed; null: any channel */
  channels: string[] | null;
  /** whether it still may: false once its token is withdrawn or its session is over */
  holds(): boolean;
}

export type Known = { ok: true; identity: Identity } | { ok: false; why: 'nobody' | 'wrong' | 'too many' };
export type SignedIn =
  | { ok: true; cookie: string; identity: Identity }
  | { ok: false; why: 'wrong' | 'too many' | 'producer' };

/** Who may do what. */
export interface Access {
  /** false: whoever can connect may do everything */
  asked: boolean;
  identify(request: IncomingMessage): Known;
  /** exchanges a token for a session: the cookie to set */
  signIn(token: string, request: IncomingMessage): SignedIn;
  /** ends the request's session; the cookie that forgets it */
  signOut(request: IncomingMessage): string;
  /** what this program's own producers show; null where nothing is asked for */
  ownToken: string | null;
}

const EVERYBODY: Identity = { name: '', role: 'everything', channels: null, holds: () => true };

/** Where only this machine can connect. */
export const openAccess = (): Access => ({
  asked: false,
  identify: () => ({ ok: true, identity: EVERYBODY }),
  signIn: () => ({ ok: true, cookie: '', identity: EVERYBODY }),
  signOut: () => '',
  ownToken: null,
});

export interface AccessNeeds {
  /** data folder with the tokens */
  folder: string;
  /** Unix seconds */
  now(): number;
  /** over TLS: the cookie is never sent without */
  secure: boolean;
  /** told in sentences */
  warn(text: string): void;
}

/** `Authorization: Bearer TOKEN` (RFC 6750, 2.1); null: no such header; '': one that is no bearer's */
function bearerOf({ headers }: IncomingMessage): string | null {
  const { authorization } = headers;
  if (authorization === undefined) return null;
  return /^Bearer +([A-Za-z0-9._~+/-]+=*)$/i.exec(authorization)?.[1] ?? '';
}

function cookieOf({ headers }: IncomingMessage, name: string): string | null {
  for (const part of (headers.cookie ?? '').split(';')) {
    const [key, value] = part.trim().split('=', 2);
    if (key === name && value !== undefined) return value;
  }
  return null;
}

/** Where tokens are asked for: by header from producers and programs, exchanged once for a cookie by pages. */
export function createAccess({ folder, now, secure, warn }: AccessNeeds): Access {
  const tokens = createTokenList(folder, warn);
  const sessions = createSessions(folder, now, warn);
  const failures = createFailures(now);
  const ownToken = newSecret();
  const own = digestOf(ownToken);
  /** keeps one pages' session apart from that of another server on the same host */
  const cookieName = (request: IncomingMessage) =>
    `${secure ? '__Host-' : ''}foreshift-${request.socket.localPort ?? 0}`;
  const byHash = (sha256: string) => tokens().find((token) => token.sha256 === sha256) ?? null;
  const identityOf = ({ name, role, channels, sha256 }: TokenRecord, holds: () => boolean): Identity => ({
    name,
    role,
    channels,
    holds: () => byHash(sha256) !== null && holds(),
  });
  const address = ({ socket }: IncomingMessage) => socket.remoteAddress ?? '';

  const byToken = (given: string, request: IncomingMessage): TokenRecord | 'wrong' | 'too many' => {
    const token = tokenFor(tokens(), given);
    // a right one gets in whatever its neighbours try: it cannot be guessed
    if (token !== null) return token;
    if (failures.tooMany(address(request))) return 'too many';
    failures.note(address(request));
    return 'wrong';
  };
  const ownIdentity = (given: string): Identity | null =>
    timingSafeEqual(digestOf(given.slice(0, 200)), own)
      ? { name: 'this server', role: 'producer', channels: null, holds: () => true }
      : null;

  return {
    asked: true,
    ownToken,
    identify(request) {
      const bearer = bearerOf(request);
      if (bearer !== null) {
        const mine = ownIdentity(bearer);
        if (mine !== null) return { ok: true, identity: mine };
        const token = byToken(bearer, request);
        return typeof token === 'string'
          ? { ok: false, why: token }
          : { ok: true, identity: identityOf(token, () => true) };
      }
      const secret = cookieOf(request, cookieName(request));
      const sha256 = secret === null ? null : sessions.tokenOf(secret);
      const token = sha256 === null ? null : byHash(sha256);
      if (token === null) return { ok: false, why: 'nobody' };
      return { ok: true, identity: identityOf(token, () => sessions.tokenOf(secret!) !== null) };
    },
    signIn(given, request) {
      const token = byToken(given, request);
      if (typeof token === 'string') return { ok: false, why: token };
      if (token.role === 'producer') return { ok: false, why: 'producer' };
      const secret = sessions.open(token);
      return {
        ok: true,
        cookie: cookie(cookieName(request), secret, SESSION_SECONDS),
        identity: identityOf(token, () => true),
      };
    },
    signOut(request) {
      const secret = cookieOf(request, cookieName(request));
      if (secret !== null) sessions.close(secret);
      return cookie(cookieName(request), '', 0);
    },
  };

  /** A cookie that no script reads and no other site's page sends (RFC 6265bis, 4.1). */
  function cookie(name: string, value: string, seconds: number): string {
    return `${name}=${value}; Path=/; Max-Age=${seconds}; HttpOnly; SameSite=Strict${secure ? '; Secure' : ''}`;
  }
}
