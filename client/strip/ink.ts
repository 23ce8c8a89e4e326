/** Colours of the palette as the canvases need them; read from the style sheet, one place for both. */
export interface Ink {
  rule: string;
  edge: string;
  ink: string;
  inkSoft: string;
  pen: string;
  red: string;
  hatch: CanvasPattern | string;
  font: string;
  boldFont: string;
}

const TILE = 9;
let current: Ink | null = null;

/** The ink of the present colour scheme; read once, until `spillInk`. */
export function ink(): Ink {
  current ??= readInk();
  return current;
}

/** Forgets the ink, so that the next drawing reads it anew (after a change of colour scheme or pixel ratio). */
export function spillInk(): void {
  current = null;
}

function readInk(): Ink {
  const style = getComputedStyle(document.documentElement);
  const colour = (name: string) => style.getPropertyValue(`--${name}`).trim();
  const family = getComputedStyle(document.body).fontFamily;
  return {
    rule: colour('rule'),
    edge: colour('edge'),
    ink: colour('ink'),
    inkSoft: colour('ink-soft'),
    pen: colour('pen'),
    red: colour('red'),
    hatch: hatch(colour('hatch-paper'), colour('hatch')),
    font: `11px ${family}`,
    boldFont: `bold 11px ${family}`,
  };
}

/** A tile of paper with one slanting line, as a repeating pattern in device pixels. */
function hatch(paper: string, line: string): CanvasPattern | string {
  const size = Math.round(TILE * devicePixelRatio);
  const tile = document.createElement('canvas');
  tile.width = tile.height = size;
  const context = tile.getContext('2d');
  if (context === null) return paper;
  context.fillStyle = paper;
  context.fillRect(0, 0, size, size);
  context.strokeStyle = line;
  context.lineWidth = devicePixelRatio;
  context.beginPath();
  for (const shift of [-size, 0, size]) {
    context.moveTo(shift - 1, size + 1);
    context.lineTo(shift + size + 1, -1);
  }
  context.stroke();
  return context.createPattern(tile, 'repeat') ?? paper;
}

/** Side of the hatch tile, CSS pixels. */
export const HATCH_TILE = TILE;
