import { setTimeout as sleep } from 'node:timers/promises';
import { describe, expect, it, vi } from 'vitest';
import type { Attempt, Send } from '../../../../server/gateway/delivery/attempt.ts';
import { createQueue, type Ending } from '../../../../server/gateway/delivery/queue.ts';

const seconds = () => performance.now() / 1000;
const queueOf = (send: Send) => createQueue({ send, now: seconds, chance: () => 1 });
const again: Attempt = { kind: 'again', text: 'answered 500', after: null };
const delivered: Attempt = { kind: 'delivered', text: 'answered 204' };

describe('a receiver’s queue', () => {
  it('sends again after growing pauses until it is delivered, and counts the attempts', async () => {
    const at: number[] = [];
    const queue = queueOf(async () => {
      at.push(seconds());
      return at.length < 3 ? again : delivered;
    });
    const ending = await new Promise<Ending>((resolve) =>
      queue.add({ body: 'x', until: seconds() + 30 }, resolve),
    );
    expect(ending).toEqual({ state: 'delivered', attempts: 3, text: 'answered 204' });
    const pauses = at.slice(1).map((time, i) => time - at[i]!);
    expect(pauses[0]!).toBeGreaterThan(0.24);
    expect(pauses[1]!).toBeGreaterThan(0.49);
    expect(queue.waiting()).toBe(0);
    await queue.close();
  });

  it('gives a message up when its time is over, not a pause later', async () => {
    const queue = queueOf(async () => again);
    const began = seconds();
    const ending = await new Promise<Ending>((resolve) =>
      queue.add({ body: 'x', until: began + 0.6 }, resolve),
    );
    expect(ending.state).toBe('given up');
    expect(ending.text).toContain('answered 500');
    expect(seconds() - began).toBeLessThan(0.9);
    await queue.close();
  });

  it('never sends what was of no more use when it came', async () => {
    const send = vi.fn(async () => delivered);
    const queue = queueOf(send);
    const ending = await new Promise<Ending>((resolve) =>
      queue.add({ body: 'x', until: seconds() - 1 }, resolve),
    );
    expect(ending).toMatchObject({ state: 'given up', attempts: 0 });
    expect(send).not.toHaveBeenCalled();
    await queue.close();
  });

  it('asks a receiver that refuses only once', async () => {
    const send = vi.fn(async (): Promise<Attempt> => ({ kind: 'refused', text: 'answered 401' }));
    const queue = queueOf(send);
    const ending = await new Promise<Ending>((resolve) =>
      queue.add({ body: 'x', until: seconds() + 30 }, resolve),
    );
    expect(ending).toEqual({ state: 'given up', attempts: 1, text: 'answered 401' });
    await queue.close();
  });

  it('has at most four attempts under way, and tries the next while a failed one pauses', async () => {
    let underWay = 0;
    let most = 0;
    const sent: string[] = [];
    const queue = queueOf(async (body) => {
      most = Math.max(most, ++underWay);
      await sleep(20);
      underWay--;
      sent.push(body);
      return body === 'bad' ? again : delivered;
    });
    const good = Array.from(
      { length: 20 },
      (_, i) =>
        new Promise<Ending>((resolve) => {
          if (i === 3) queue.add({ body: 'bad', until: seconds() + 30 }, () => {});
          queue.add({ body: `${i}`, until: seconds() + 30 }, resolve);
        }),
    );
    await Promise.all(good);
    expect(most).toBe(4);
    expect(sent.filter((body) => body !== 'bad')).toHaveLength(20);
    expect(queue.waiting()).toBe(1);
    await queue.close();
  });

  it('ends what is under way when it closes, settles nothing after, and leaves what waited unsettled', async () => {
    const ended = vi.fn();
    let stopped = 0;
    const queue = queueOf(
      (_, signal) =>
        new Promise((resolve) => {
          signal.addEventListener('abort', () => {
            stopped++;
            resolve(again);
          });
        }),
    );
    for (let i = 0; i < 6; i++) queue.add({ body: 'x', until: seconds() + 30 }, ended);
    await queue.close();
    expect(stopped).toBe(4);
    expect(ended).not.toHaveBeenCalled();
  });
});
