import type { WhoAmI } from '../../shared-types/access.ts';
import { element, mark, say } from '../dom.ts';
import { signIn, tokenIn, whoAmI } from './requests.ts';

/** Where this server asks for no token, everybody may do everything. */
const EVERYBODY: WhoAmI = { tokens: false, role: 'operator', name: null };

/**
 * Who is at the page: at once where nothing is asked for or the page is signed in, else as soon as a person has signed
 * in, on a sheet that takes the page's place until then.
 */
export async function enter(host: HTMLElement): Promise<WhoAmI> {
  const given = tokenIn(location.hash);
  // nobody who looks over the shoulder, or at the history, finds it
  if (given !== null) history.replaceState(null, '', given.rest);
  const who = (await whoAmI()) ?? EVERYBODY;
  if (!who.tokens) return who;
  let fault: string | null = null;
  if (given !== null) {
    try {
      return await signIn(given.token);
    } catch (error) {
      fault = (error as Error).message;
    }
  }
  return who.role !== null && fault === null ? who : askForToken(host, fault);
}

function askForToken(host: HTMLElement, why: string | null): Promise<WhoAmI> {
  document.title = 'Sign in · Foreshift';
  const token = element('input');
  token.type = 'password';
  token.name = 'token';
  token.required = true;
  token.maxLength = 200;
  mark(token, 'autocomplete', 'current-password');
  mark(token, 'spellcheck', 'false');
  mark(token, 'aria-describedby', 'signInFault');
  const fault = element('p', 'fault');
  fault.id = 'signInFault';
  mark(fault, 'role', 'alert');
  say(fault, why === null ? null : sentence(why));
  const go = element('button', 'first', 'Sign in');
  const form = element(
    'form',
    'signIn',
    element('h2', '', 'Who is there?'),
    element('p', '', 'Other machines can reach this server, so it asks each page once for a token.'),
    element('label', 'field', element('span', '', 'Token'), token),
    element('p', 'buttons', go),
    fault,
    element('p', 'note', 'Who runs the server creates one, on its machine, and sees it once:'),
    element('pre', '', 'npx foreshift token create "your name" --role operator'),
    element(
      'p',
      'note',
      'An operator may do everything, a viewer may look. This page stays signed in for thirty days.',
    ),
  );
  host.replaceChildren(
    element('header', 'head', element('h1', 'program', 'Foreshift')),
    element('main', 'door', form),
    element(
      'footer',
      'caution',
      element('strong', '', 'An aid to attention, not a safety function.'),
      ' Foreshift is no interlock, no trip and no protection layer; local codes and licensed practice govern.',
    ),
  );
  token.focus();
  return new Promise((resolve) => {
    form.addEventListener('submit', async (event) => {
      event.preventDefault();
      go.disabled = true;
      say(fault, null);
      try {
        resolve(await signIn(token.value.trim()));
      } catch (error) {
        say(fault, sentence((error as Error).message));
        go.disabled = false;
        token.select();
      }
    });
  });
}

/** A server's clause as a sentence. */
function sentence(words: string): string {
  const begun = words.slice(0, 1).toUpperCase() + words.slice(1);
  return /[.!?]$/.test(begun) ? begun : `${begun}.`;
}
