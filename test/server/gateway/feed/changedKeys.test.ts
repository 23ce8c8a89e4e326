import { TestScheduler } from 'rxjs/testing';
import { describe, expect, it } from 'vitest';
import { changedKeys } from '../../../../server/gateway/feed/changedKeys.ts';

const scheduler = () => new TestScheduler((actual, expected) => expect(actual).toEqual(expected));

describe('the keys of changed states', () => {
  it('come once a period each, and not at all when nothing changed', () => {
    scheduler().run(({ hot, expectObservable, expectSubscriptions }) => {
      const touched$ = hot('  aab-- ----- -c|');
      const expected = '      -----x ----- -(y|)';
      const told$ = touched$.pipe(changedKeys(5));
      expectObservable(told$).toBe(expected.replaceAll(' ', ''), { x: ['a', 'b'], y: ['c'] });
      expectSubscriptions(touched$.subscriptions).toBe('^-----------!');
    });
  });

  it('let go of the source when a page leaves, and pass its end by an error on', () => {
    scheduler().run(({ hot, expectObservable, expectSubscriptions }) => {
      const left$ = hot('a----------');
      expectObservable(left$.pipe(changedKeys(5)), '^--!').toBe('----');
      expectSubscriptions(left$.subscriptions).toBe('^--!');
      const failing$ = hot('a-#');
      expectObservable(failing$.pipe(changedKeys(5))).toBe('--#');
    });
  });
});
