import { decode } from 'cbor-x/decode-no-eval';
import { Observable, type Subscription } from 'rxjs';
import { FEED_PROTOCOL, type FeedMessage, type FeedRequest } from '../shared-types/feed.ts';
import { reconnecting } from './reconnect.ts';

/** What happens on the way to the server. `closed` is the end of one attempt. */
export type FeedHappening = { kind: 'open' } | { kind: 'message'; message: FeedMessage } | { kind: 'closed' };

/** A server that says nothing for this long (ms) is hung up on and called again; it promises a beat a second. */
const HANG_UP_AFTER = 6000;

/**
 * The server's feed, connected again for ever. Messages that cannot be decoded are passed over.
 *
 * @param address WebSocket address of `/feed`
 * @param say$    what the page says: what it draws, its newest again at each connection, and trials it has shown
 */
export function feed(address: string, say$: Observable<FeedRequest>): Observable<FeedHappening> {
  return attempt(address, say$).pipe(reconnecting((happening) => happening.kind === 'message'));
}

function attempt(address: string, say$: Observable<FeedRequest>): Observable<FeedHappening> {
  return new Observable((subscriber) => {
    const socket = new WebSocket(address, FEED_PROTOCOL);
    socket.binaryType = 'arraybuffer';
    let saying: Subscription | null = null;
    let silence = setTimeout(() => socket.close(), HANG_UP_AFTER);
    socket.onopen = () => {
      subscriber.next({ kind: 'open' });
      saying = say$.subscribe((request) => socket.send(JSON.stringify(request)));
    };
    socket.onmessage = (event) => {
      clearTimeout(silence);
      silence = setTimeout(() => socket.close(), HANG_UP_AFTER);
      const message = readMessage(event.data);
      if (message !== null) subscriber.next({ kind: 'message', message });
    };
    socket.onclose = () => {
      subscriber.next({ kind: 'closed' });
      subscriber.complete();
    };
    return () => {
      clearTimeout(silence);
      saying?.unsubscribe();
      socket.onopen = socket.onmessage = socket.onclose = null;
      socket.close();
    };
  });
}

/** A feed message out of a binary frame; null when it is none. */
export function readMessage(data: unknown): FeedMessage | null {
  if (!(data instanceof ArrayBuffer)) return null;
  try {
    const message: unknown = decode(new Uint8Array(data));
    return isMessage(message) ? message : null;
  } catch {
    return null;
  }
}

function isMessage(value: unknown): value is FeedMessage {
  return (
    typeof value === 'object' && value !== null && typeof (value as { kind?: unknown }).kind === 'string'
  );
}
