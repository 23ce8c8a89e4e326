import type { WhoAmI } from '../../shared-types/access.ts';
import { ask, reach, send } from '../requests.ts';

/** Who this page is to the server; null while the server cannot be reached. */
export async function whoAmI(): Promise<WhoAmI | null> {
  return (await ask('/access').catch(() => null)) as WhoAmI | null;
}

/** Exchanges a token for a session. @throws Error with the server's own sentence */
export async function signIn(token: string): Promise<WhoAmI> {
  return (await send('/access', { token })) as WhoAmI;
}

/** Ends the session. @throws Error with the server's own sentence */
export async function signOut(): Promise<void> {
  await reach('/access', { method: 'DELETE' });
}

/**
 * The token of an address that a person was given, `…/#token=…`, and the address without it; null: it holds none. What
 * follows `#` is never sent to a server, so it stands in no log on the way.
 */
export function tokenIn(hash: string): { token: string; rest: string } | null {
  const found = /^#token=([\w-]+)$/.exec(hash);
  return found === null ? null : { token: found[1]!, rest: '#/' };
}
