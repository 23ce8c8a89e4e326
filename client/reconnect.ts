import {
  catchError,
  defer,
  EMPTY,
  type MonoTypeOperatorFunction,
  repeat,
  type SchedulerLike,
  tap,
  timer,
} from 'rxjs';

const FIRST_DELAY = 250;
const LONGEST_DELAY = 5000;

/** Milliseconds to wait before the next attempt after `failures` attempts without a message: doubling, at most 5 s. */
export function reconnectDelay(failures: number): number {
  return Math.min(LONGEST_DELAY, FIRST_DELAY * 2 ** Math.min(failures, 10));
}

/**
 * Starts a source again whenever it completes or fails, waiting `reconnectDelay`; a value that `isAlive` accepts
 * sets the count of failures back. Never completes, never fails; unsubscribing ends the wait as well.
 */
export function reconnecting<T>(
  isAlive: (value: T) => boolean,
  scheduler?: SchedulerLike,
): MonoTypeOperatorFunction<T> {
  return (source) =>
    defer(() => {
      let failures = 0;
      return source.pipe(
        tap((value) => {
          if (isAlive(value)) failures = 0;
        }),
        catchError(() => EMPTY),
        repeat({ delay: () => timer(reconnectDelay(failures++), scheduler) }),
      );
    });
}
