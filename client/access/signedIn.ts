import type { WhoAmI } from '../../shared-types/access.ts';
import { button, element, mark, say } from '../dom.ts';
import { LOOK_ONLY, onlyLook } from './changes.ts';
import { signOut, whoAmI } from './requests.ts';

/** The line that says who is signed in; null where nobody has to be. For a viewer it also stops what would change something. */
export function signedIn(who: WhoAmI): HTMLElement | null {
  if (!who.tokens || who.role === null) return null;
  const words = element('span', '', whoText(who));
  const told = element('strong', '');
  mark(told, 'role', 'alert');
  say(told, null);
  const leave = button('Sign out', 'quiet', () => {
    signOut().then(
      () => location.reload(),
      (error: Error) => say(told, error.message),
    );
  });
  if (who.role === 'viewer') {
    let timer: ReturnType<typeof setTimeout> | undefined;
    onlyLook(() => {
      clearTimeout(timer);
      say(told, LOOK_ONLY);
      timer = setTimeout(() => say(told, null), 8000);
    });
  }
  const line = element('p', 'signedIn', words, leave, told);
  mark(line, 'data-role', who.role);
  return line;
}

/** Who is signed in, in words. */
export function whoText({ role, name }: WhoAmI): string {
  return role === 'viewer'
    ? `Signed in as ${name}, a viewer: you see everything and change nothing.`
    : `Signed in as ${name}, an operator.`;
}

/** After the connection was lost: whoever is signed out meanwhile is asked to sign in again. */
export async function leaveIfOut(): Promise<void> {
  const who = await whoAmI();
  if (who?.tokens && who.role === null) location.reload();
}
