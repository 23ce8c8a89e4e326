/**
 * Contrast of the palette by WCAG 2.2: relative luminance L = 0.2126 R + 0.7152 G + 0.0722 B of the linearised
 * channels (c / 12.92 up to 0.04045, else ((c + 0.055) / 1.055)^2.4), ratio (L1 + 0.05) / (L2 + 0.05); 4.5 for text
 * and 3 for the boundaries of what is used (success criteria 1.4.3 and 1.4.11). The thresholds and the formula are
 * as the recommendation prints them; the check values (black on white 21, #777777 on white 4.4781, red on white
 * 3.9985, blue on white 8.5925) are recomputed.
 */
import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';

const CSS = readFileSync(new URL('../../client/style/palette.css', import.meta.url), 'utf8');

function luminance(colour: string): number {
  const [r, g, b] = [1, 3, 5].map((at) => {
    const c = Number.parseInt(colour.slice(at, at + 2), 16) / 255;
    return c <= 0.04045 ? c / 12.92 : ((c + 0.055) / 1.055) ** 2.4;
  });
  return 0.2126 * r! + 0.7152 * g! + 0.0722 * b!;
}

function contrast(one: string, other: string): number {
  const [dark, light] = [luminance(one), luminance(other)].sort((a, b) => a - b);
  return (light! + 0.05) / (dark! + 0.05);
}

function palettes(): Record<string, Map<string, string>> {
  const blocks = [...CSS.matchAll(/(@media ([^{]*)\{\s*)?:root\s*\{([^}]*)\}/g)];
  const light = colours(blocks[0]![3]!);
  return Object.fromEntries(
    blocks.map((block) => [block[2]?.trim() ?? 'light', new Map([...light, ...colours(block[3]!)])]),
  );
}

function colours(block: string): Map<string, string> {
  return new Map(
    [...block.matchAll(/--([a-z-]+):\s*(#[0-9a-f]{6})/g)].map((found) => [found[1]!, found[2]!]),
  );
}

const TEXT: [string, string[]][] = [
  ['ink', ['paper', 'paper-ahead', 'paper-raised', 'hatch-paper']],
  ['ink-soft', ['paper', 'paper-ahead', 'paper-raised']],
  ['pen', ['paper']],
  ['red', ['paper', 'paper-ahead', 'paper-raised']],
  ['on-ink', ['ink']],
  ['on-red', ['red']],
];
const BOUNDARIES: [string, string[]][] = [
  ['edge', ['paper', 'paper-ahead', 'paper-raised']],
  ['red', ['red-paper', 'paper-ahead']],
  ['ink', ['hatch-paper', 'paper']],
  ['pen', ['paper']],
];

describe('the formula', () => {
  it('gives the known ratios', () => {
    expect(contrast('#000000', '#ffffff')).toBeCloseTo(21, 10);
    expect(contrast('#777777', '#ffffff')).toBeCloseTo(4.4781, 4);
    expect(contrast('#ff0000', '#ffffff')).toBeCloseTo(3.9985, 4);
    expect(contrast('#0000ff', '#ffffff')).toBeCloseTo(8.5925, 4);
  });
});

describe('the palette', () => {
  it('has a light, a dark and a printed form', () => {
    expect(Object.keys(palettes())).toEqual(['light', '(prefers-color-scheme: dark)', 'print']);
  });

  for (const [name, palette] of Object.entries(palettes())) {
    it(`has text of at least 4.5 to 1 and boundaries of at least 3 to 1 (${name})`, () => {
      const ratio = (front: string, back: string) => contrast(palette.get(front)!, palette.get(back)!);
      for (const [front, backs] of TEXT)
        for (const back of backs)
          expect(ratio(front, back), `${front} on ${back}`).toBeGreaterThanOrEqual(4.5);
      for (const [front, backs] of BOUNDARIES)
        for (const back of backs)
          expect(ratio(front, back), `${front} beside ${back}`).toBeGreaterThanOrEqual(3);
    });
  }
});
