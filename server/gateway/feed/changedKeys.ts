import { bufferTime, filter, map, type Observable } from 'rxjs';

/**
 * Which states changed, each key once a period however often it changed, in the order of the first change.
 *
 * @param milliseconds the period
 */
export const changedKeys =
  (milliseconds: number) =>
  (touched$: Observable<string>): Observable<string[]> =>
    touched$.pipe(
      bufferTime(milliseconds),
      filter((keys) => keys.length > 0),
      map((keys) => [...new Set(keys)]),
    );
