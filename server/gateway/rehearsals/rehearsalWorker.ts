import { setPriority } from 'node:os';
import { parentPort, workerData } from 'node:worker_threads';
import type { StoredSamples } from '../../recordings/readStored.ts';
import type { HelperOrder, HelperReply, SearchOrder, SearchReply } from './rehearsalMessages.ts';
import { answer, search } from './rehearsalWork.ts';

const port = parentPort!;

/** Progress is told this often at most, milliseconds. */
const TELL_EVERY = 100;
/** Recordings kept to ask again. */
const KEPT = 2;

function serveSearch(): void {
  const say = (reply: SearchReply, owned: ArrayBuffer[] = []) => port.postMessage(reply, owned);
  let told = Number.NEGATIVE_INFINITY;
  port.on('message', (order: SearchOrder) => {
    const reply = search(order, (done, doing) => {
      const now = performance.now();
      if (now - told < TELL_EVERY) return;
      told = now;
      say({ kind: 'progress', done, doing });
    });
    say(reply, reply.kind === 'done' ? [reply.result.buffer as ArrayBuffer] : []);
  });
}

function serveQuestions(): void {
  const say = (reply: HelperReply) => port.postMessage(reply);
  const kept = new Map<string, StoredSamples>();
  port.on('message', ({ id, key, recording, question }: HelperOrder) => {
    try {
      if (recording !== null) {
        kept.delete(key);
        kept.set(key, recording);
        while (kept.size > KEPT) kept.delete(kept.keys().next().value!);
      }
      say({ kind: 'answer', id, answer: answer(kept.get(key)!, question) });
    } catch (error) {
      const { code = 'CANNOT_BE_USED', message } = error as Error & { code?: string };
      say({ kind: 'refused', id, code, message });
    }
  });
}

// what arrives comes first; elsewhere this would slow the whole program
if (process.platform === 'linux') setPriority(10);
if (workerData === 'search') serveSearch();
else serveQuestions();
