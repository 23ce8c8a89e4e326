import type { Attempt, Send } from './attempt.ts';
import { retryAfter } from './backOff.ts';
import { CLOUD_EVENTS_JSON } from './cloudEvent.ts';
import { signedHeaders } from './signature.ts';

export interface WebhookNeeds {
  url: string;
  /** by which the receiver knows the key */
  name: string;
  /** null: messages are not signed */
  key: Uint8Array | null;
  /** seconds an attempt may take, the answer included */
  timeLimit: number;
  /** Unix seconds */
  now(): number;
}

/** So much of an answer is read; none of it is kept. */
const ANSWER_BYTES = 16_384;
const MOST_REDIRECTS = 3;
/** These alone keep a POST a POST (RFC 9110, section 15.4). */
const REDIRECTS = [307, 308];
/** Statuses of a client's fault that may pass: request timeout, too early, too many requests. */
const MAY_PASS = [408, 425, 429];

/** Reads an answer to its end, so that the connection can be used again, or hangs up on one that is too long. */
async function passOver(response: Response): Promise<void> {
  const reader = response.body?.getReader();
  if (reader === undefined) return;
  for (let bytes = 0; bytes < ANSWER_BYTES; ) {
    const { done, value } = await reader.read();
    if (done) return;
    bytes += value.length;
  }
  await reader.cancel();
}

/** Where a redirect leads, on the same origin; null: elsewhere, or nowhere. */
function sameOrigin(from: URL, location: string | null): URL | null {
  if (location === null || !URL.canParse(location, from.href)) return null;
  const to = new URL(location, from.href);
  return to.origin === from.origin ? to : null;
}

function why(error: unknown, timeLimit: number): string {
  const { name, message, cause } = error as Error & { cause?: { code?: string; message?: string } };
  if (name === 'TimeoutError') return `did not answer within ${timeLimit} s`;
  if (name === 'AbortError') return 'the server stopped before it answered';
  return `cannot be reached (${cause?.code ?? cause?.message ?? message})`;
}

/** What an answer means for the message. */
function judge(response: Response, now: number): Attempt {
  const { status } = response;
  const text = `answered ${status}`;
  if (response.ok) return { kind: 'delivered', text };
  if (status >= 300 && status < 400)
    return {
      kind: 'refused',
      text: `${text}: it redirects to where a warning is not sent on; write the new address into settings.json`,
    };
  if (status >= 500 || MAY_PASS.includes(status))
    return { kind: 'again', text, after: retryAfter(response.headers.get('retry-after'), now) };
  return { kind: 'refused', text };
}

/**
 * Posts CloudEvents in structured mode to one address, signed by RFC 9421 where there is a key. 2xx: delivered. 5xx, 408,
 * 425, 429 and what cannot be reached: to be sent again. 307 and 308 are followed on the same origin. All else: refused.
 */
export function createWebhook({ url, name, key, timeLimit, now }: WebhookNeeds): Send {
  const post = (to: URL, body: string, signal: AbortSignal) =>
    fetch(to, {
      method: 'POST',
      redirect: 'manual',
      signal,
      body,
      headers: {
        'Content-Type': CLOUD_EVENTS_JSON,
        ...(key === null
          ? {}
          : signedHeaders(to, CLOUD_EVENTS_JSON, body, { key, keyId: name, created: now() })),
      },
    });
  return async (body, stopped) => {
    const signal = AbortSignal.any([stopped, AbortSignal.timeout(1000 * timeLimit)]);
    let to = new URL(url);
    try {
      for (let hops = 0; ; hops++) {
        const response = await post(to, body, signal);
        await passOver(response);
        const next = REDIRECTS.includes(response.status)
          ? sameOrigin(to, response.headers.get('location'))
          : null;
        if (next === null || hops === MOST_REDIRECTS) return judge(response, now());
        to = next;
      }
    } catch (error) {
      return { kind: 'again', text: why(error, timeLimit), after: null };
    }
  };
}
