import type { Stretch } from '../regimes.ts';

/** One recording's place on a sheet: `start` is where it begins there, in seconds of paper. */
export interface Piece extends Stretch {
  start: number;
}

/** Recordings one after the other on one sheet of paper, a little apart, however long nothing was recorded between. */
export interface Sheet {
  pieces: Piece[];
  /** seconds of paper */
  length: number;
}

/** Paper between two recordings, as a share of all that is recorded. */
const APART = 0.012;

/** Lays recordings on a sheet in the order given. */
export function createSheet(recordings: readonly Stretch[]): Sheet {
  const recorded = recordings.reduce((sum, { from, to }) => sum + (to - from), 0);
  let start = 0;
  const pieces = recordings.map(({ from, to }) => {
    const piece = { from, to, start };
    start += to - from + APART * recorded;
    return piece;
  });
  return { pieces, length: Math.max(0, start - (pieces.length > 0 ? APART * recorded : 0)) };
}

/** Where a moment of recording `index` lies on the sheet. */
export function placeOn({ pieces }: Sheet, index: number, time: number): number {
  const { from, start } = pieces[index]!;
  return start + (time - from);
}

/** The recording and the moment nearest to a place on the sheet; index −1 on an empty sheet. */
export function momentAt({ pieces }: Sheet, place: number): { index: number; time: number } {
  let found = { index: -1, time: 0 };
  let nearest = Infinity;
  pieces.forEach(({ from, to, start }, index) => {
    const time = Math.min(to, Math.max(from, from + (place - start)));
    const away = Math.abs(start + (time - from) - place);
    if (away >= nearest) return;
    nearest = away;
    found = { index, time };
  });
  return found;
}

/** A stretch of channel time as stretches of the sheet, one for each recording that it touches. */
export function stretchesOn({ pieces }: Sheet, { from, to }: Stretch): Stretch[] {
  return pieces.flatMap((piece) => {
    const begin = Math.max(from, piece.from);
    const end = Math.min(to, piece.to);
    if (!(end > begin)) return [];
    return [{ from: piece.start + (begin - piece.from), to: piece.start + (end - piece.from) }];
  });
}

/** Ticks of the paper between two places: tidy moments of each recording, as places with their moments. */
export function sheetTicks(
  { pieces }: Sheet,
  from: number,
  to: number,
  step: number,
): { place: number; time: number }[] {
  const ticks: { place: number; time: number }[] = [];
  for (const piece of pieces) {
    const begin = Math.max(piece.from, piece.from + (from - piece.start));
    const end = Math.min(piece.to, piece.from + (to - piece.start));
    for (let k = Math.ceil(begin / step); k * step <= end; k++)
      ticks.push({ place: piece.start + (k * step - piece.from), time: k * step });
  }
  return ticks;
}
