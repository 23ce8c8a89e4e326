/** Spans of the past the page can show, seconds. */
export const LOOKS = [2, 5, 10, 20, 30, 60, 120, 180, 300, 600, 1200, 1800, 3600, 7200, 21600, 86400];

/** The span that shows about nine horizons of the farthest-seeing watch; 180 s where nothing is watched. */
export function lookFor(horizons: readonly number[]): number {
  const farthest = Math.max(0, ...horizons);
  if (farthest === 0) return 180;
  return LOOKS.find((seconds) => seconds >= 8.9 * farthest) ?? LOOKS[LOOKS.length - 1]!;
}

/** The next shorter or longer span. */
export function nextLook(seconds: number, way: 'shorter' | 'longer'): number {
  if (way === 'longer') return LOOKS.find((each) => each > seconds) ?? seconds;
  return LOOKS.findLast((each) => each < seconds) ?? seconds;
}
