import { describe, expect, it } from 'vitest';
import { createSheet, momentAt, placeOn, sheetTicks, stretchesOn } from '../../../client/rehearse/sheet.ts';

const sheet = createSheet([
  { from: 1000, to: 1600 },
  { from: 9000, to: 9400 },
]);

describe('recordings on one sheet of paper', () => {
  it('stand one after the other, a little apart, whatever time lies between them', () => {
    expect(sheet.pieces[0]).toEqual({ from: 1000, to: 1600, start: 0 });
    expect(sheet.pieces[1]!.start).toBeGreaterThan(600);
    expect(sheet.pieces[1]!.start).toBeLessThan(650);
    expect(sheet.length).toBe(sheet.pieces[1]!.start + 400);
    expect(createSheet([]).length).toBe(0);
    expect(createSheet([{ from: 5, to: 25 }]).length).toBe(20);
  });

  it('give a place for each moment and the moment back for each place', () => {
    for (const [index, time] of [
      [0, 1000],
      [0, 1333],
      [1, 9000],
      [1, 9400],
    ] as const)
      expect(momentAt(sheet, placeOn(sheet, index, time))).toEqual({ index, time });
  });

  it('take the nearest moment where the paper is empty', () => {
    expect(momentAt(sheet, -50)).toEqual({ index: 0, time: 1000 });
    expect(momentAt(sheet, 601)).toEqual({ index: 0, time: 1600 });
    expect(momentAt(sheet, sheet.length + 9)).toEqual({ index: 1, time: 9400 });
    expect(momentAt(createSheet([]), 3).index).toBe(-1);
  });

  it('cut a stretch of time to what each recording has of it', () => {
    const second = sheet.pieces[1]!.start;
    expect(stretchesOn(sheet, { from: 1500, to: 9100 })).toEqual([
      { from: 500, to: 600 },
      { from: second, to: second + 100 },
    ]);
    expect(stretchesOn(sheet, { from: 2000, to: 3000 })).toEqual([]);
    expect(stretchesOn(sheet, { from: -Infinity, to: Infinity })).toHaveLength(2);
  });

  it('have ticks at tidy moments of each recording', () => {
    const ticks = sheetTicks(sheet, 250, sheet.length, 300);
    expect(ticks.map(({ time }) => time)).toEqual([1500, 9000, 9300]);
    for (const { place, time } of ticks) expect(momentAt(sheet, place).time).toBeCloseTo(time, 9);
  });
});
