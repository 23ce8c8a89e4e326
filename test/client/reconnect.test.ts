import { of, throwError } from 'rxjs';
import { TestScheduler } from 'rxjs/testing';
import { describe, expect, it } from 'vitest';
import { reconnectDelay, reconnecting } from '../../client/reconnect.ts';

const run = (test: Parameters<TestScheduler['run']>[0]) =>
  new TestScheduler((actual, expected) => expect(actual).toEqual(expected)).run(test);

describe('a lost server is called again', () => {
  it('waits twice as long each time, at most five seconds', () => {
    expect([0, 1, 2, 3, 4, 5, 60].map(reconnectDelay)).toEqual([250, 500, 1000, 2000, 4000, 5000, 5000]);
  });

  it('starts again after the end of each attempt, later and later', () => {
    run(({ cold, expectObservable }) => {
      const attempt = cold('(c|)');
      expectObservable(attempt.pipe(reconnecting(() => false)), '1s !').toBe('c 249ms c 499ms c');
    });
  });

  it('takes an error for an end', () => {
    run(({ cold, expectObservable, expectSubscriptions }) => {
      const attempt = cold('a#');
      expectObservable(attempt.pipe(reconnecting(() => false)), '400ms !').toBe('a 250ms a');
      expectSubscriptions(attempt.subscriptions).toBe(['^!', '251ms ^!']);
    });
  });

  it('counts from the beginning once a message has come', () => {
    run(({ cold, expectObservable }) => {
      const attempt = cold('(m|)');
      expectObservable(attempt.pipe(reconnecting((value) => value === 'm')), '600ms !').toBe(
        'm 249ms m 249ms m',
      );
    });
  });

  it('hangs up and waits no more when nobody listens', () => {
    run(({ cold, expectObservable, expectSubscriptions }) => {
      const attempt = cold('a--------');
      expectObservable(attempt.pipe(reconnecting(() => true)), '---!').toBe('a');
      expectSubscriptions(attempt.subscriptions).toBe('^--!');
    });
  });

  it('begins its count anew for every subscriber', () => {
    run(({ expectObservable }) => {
      const source = of('x').pipe(reconnecting(() => false));
      expectObservable(source, '300ms !').toBe('x 249ms x');
      expectObservable(source, '300ms !').toBe('x 249ms x');
    });
  });

  it('survives a source that fails at once', () => {
    run(({ expectObservable }) => {
      expectObservable(throwError(() => new Error('refused')).pipe(reconnecting(() => true)), '2s !').toBe(
        '',
      );
    });
  });
});
