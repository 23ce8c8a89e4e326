import type { TriedSetting } from '../../shared-types/rehearsal.ts';

/** Windows against ranks: what was tried of the forcing. */
export interface SettingsMap {
  /** seconds, ascending */
  windows: number[];
  /** descending: the highest on top */
  ranks: number[];
  /** cells[rank][window]; null: not tried */
  cells: (TriedSetting | null)[][];
  /** what was tried without window and rank: plain levels */
  levels: TriedSetting[];
  /** the greatest skill of a cell; 0 where none has any */
  best: number;
}

/** The map of what was tried. Where a window and rank stand there twice, the better one is kept. */
export function mapOf(pairs: readonly TriedSetting[]): SettingsMap {
  const levels = pairs.filter(({ variable }) => variable !== 'forcing');
  const forcings = pairs.filter(({ variable }) => variable === 'forcing');
  const delays = unique(forcings.map((pair) => pair.delays)).sort((a, b) => a - b);
  const ranks = unique(forcings.map(({ rank }) => rank)).sort((a, b) => b - a);
  const cells = ranks.map((rank) =>
    delays.map((window) => {
      const here = forcings.filter((pair) => pair.delays === window && pair.rank === rank);
      return here.reduce<TriedSetting | null>(
        (best, pair) => (best === null || pair.skill > best.skill ? pair : best),
        null,
      );
    }),
  );
  return {
    windows: delays.map((count) => forcings.find((pair) => pair.delays === count)!.window),
    ranks,
    cells,
    levels,
    best: Math.max(0, ...forcings.map(({ skill }) => skill)),
  };
}

/** How dark a cell is, 0..1: skill against the whole of what skill can be; no skill, and worse, is blank paper. */
export function densityOf(skill: number): number {
  return Number.isFinite(skill) ? Math.min(1, Math.max(0, skill)) : 0;
}

/** The cell an arrow key leads to from a cell; the same one at the edge and for other keys. */
export function nextCell(
  { ranks, windows }: SettingsMap,
  at: { row: number; column: number },
  key: string,
): { row: number; column: number } {
  const [down, right] = { ArrowUp: [-1, 0], ArrowDown: [1, 0], ArrowLeft: [0, -1], ArrowRight: [0, 1] }[
    key
  ] ?? [0, 0];
  return {
    row: Math.min(ranks.length - 1, Math.max(0, at.row + down!)),
    column: Math.min(windows.length - 1, Math.max(0, at.column + right!)),
  };
}

const unique = (values: number[]): number[] => [...new Set(values)];
