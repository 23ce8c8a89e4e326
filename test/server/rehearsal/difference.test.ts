import { describe, expect, it } from 'vitest';
import { type Blocks, blocksOf, joinBlocks, skillDifference } from '../../../server/rehearsal/difference.ts';
import { addTally, emptyTally, isBlind, type Steps, skillOf } from '../../../server/rehearsal/tally.ts';
import { createRandom } from '../../../server/signal/random.ts';

/** Blocks of ten watched steps with a switch each. */
function blocks(warned: number[], spanned: number[]): Blocks {
  return {
    counted: Uint8Array.from(warned, () => 1),
    warned: Uint8Array.from(warned),
    watched: Int32Array.from(warned, () => 10),
    spanned: Int32Array.from(spanned),
  };
}
const many = (count: number, of: number) => Array.from({ length: of }, (_, i) => Number(i < count));
const same = (value: number, of: number) => Array.from({ length: of }, () => value);

describe('the difference in skill of two warners on the same switches', () => {
  it('is that of the detections less that of the shares of time', () => {
    const ours = blocks([1, 1, 1, 0], [3, 3, 3, 3]);
    const theirs = blocks([1, 0, 0, 0], [1, 1, 1, 1]);
    expect(skillDifference(ours, theirs, createRandom(1).uniform).value).toBeCloseTo(0.5 - 0.2, 12);
  });

  it('is not certain for warners that warn of the same switches: the share of time in spans varies too', () => {
    const spans = Array.from({ length: 60 }, (_, i) => (i % 3 === 0 ? 9 : 1));
    const ours = blocks(same(1, 60), spans);
    const theirs = blocks(same(1, 60), [...spans].reverse());
    const { value, low, high } = skillDifference(ours, theirs, createRandom(1).uniform);
    expect(value).toBeCloseTo(0, 12);
    expect(low).toBeLessThan(-0.02);
    expect(high).toBeGreaterThan(0.02);
  });

  it('is nothing for a warner compared with itself', () => {
    const { uniform } = createRandom('itself');
    const ours = blocks(
      same(0, 40).map(() => Number(uniform() < 0.6)),
      same(0, 40).map(() => Math.floor(11 * uniform())),
    );
    expect(skillDifference(ours, ours, createRandom(1).uniform)).toEqual({ value: 0, low: 0, high: 0 });
  });

  it('has the interval of the binomial law where only one of the two may warn, of switches in no order', () => {
    // 60 of 100 against none: the normal approximation is 0.6 ± 1.96 · √(0.6 · 0.4/100)
    const { uniform } = createRandom('order');
    const shuffled = many(60, 100)
      .map((warned) => ({ warned, at: uniform() }))
      .sort((a, b) => a.at - b.at)
      .map(({ warned }) => warned);
    const found = skillDifference(
      blocks(shuffled, same(0, 100)),
      blocks(same(0, 100), same(0, 100)),
      createRandom(1).uniform,
    );
    expect(found.low).toBeCloseTo(0.6 - 0.096, 1);
    expect(found.high).toBeCloseTo(0.6 + 0.096, 1);
  });

  /** Both warners on 80 switches; what follows a warned one tends to be warned, and longer spans lie before it. */
  function dependent(uniform: () => number): [Blocks, Blocks] {
    let state = 1;
    const states = same(0, 80).map(() => {
      if (uniform() < 0.4) state = Number(uniform() < 0.7);
      return state;
    });
    const warner = () =>
      blocks(
        states.map((one) => Number(uniform() < 0.2 + 0.7 * one)),
        states.map((one) => Math.floor((2 + 4 * one) * uniform())),
      );
    return [warner(), warner()];
  }

  it('covers no difference in about nineteen of twenty cases when there is none', () => {
    const { uniform } = createRandom('coverage');
    let covered = 0;
    for (let round = 0; round < 400; round++) {
      const { low, high } = skillDifference(...dependent(uniform), uniform, 400);
      if (low <= 0 && high >= 0) covered++;
    }
    // 380 expected; three standard deviations are 13, and a percentile interval of 80 blocks is a little short
    expect(covered).toBeGreaterThan(360);
    expect(covered).toBeLessThan(394);
  });

  it('is about as wide as differences scatter from recording to recording, where neighbours are alike', () => {
    const { uniform } = createRandom('scatter');
    // spans alone, each lasting over four switches in a row, against none
    const clustered = (): [Blocks, Blocks] => {
      const spans = same(0, 30).flatMap(() => same(Math.floor(11 * uniform()), 4));
      return [blocks(same(0, 120), spans), blocks(same(0, 120), same(0, 120))];
    };
    const values = same(0, 400).map(() => skillDifference(...clustered(), uniform, 2).value);
    const mean = values.reduce((sum, one) => sum + one, 0) / 400;
    const scatter = Math.sqrt(values.reduce((sum, one) => sum + (one - mean) ** 2, 0) / 400);
    const widths = same(0, 60).map(() => {
      const { low, high } = skillDifference(...clustered(), uniform, 400);
      return high - low;
    });
    const width = widths.reduce((sum, one) => sum + one, 0) / 60;
    // blocks drawn one by one would give half of it
    expect(width / (2 * 1.96 * scatter)).toBeGreaterThan(0.75);
    expect(width / (2 * 1.96 * scatter)).toBeLessThan(1.15);
  });
});

describe('what a warner did from switch to switch', () => {
  /** Steps with gaps, switches and warnings at random; the first part is not scored. */
  function random(seed: string): { steps: Steps; warnings: Int32Array } {
    const { uniform } = createRandom(seed);
    const count = 400;
    const watchedBefore = new Int32Array(count + 1);
    const at = (share: number) => Int32Array.from([...Array(count).keys()].filter(() => uniform() < share));
    let seen = 1;
    for (let i = 0; i < count; i++) {
      if (uniform() < 0.05) seen = 1 - seen;
      watchedBefore[i + 1] = watchedBefore[i]! + seen;
    }
    const steps: Steps = {
      leastLead: 3,
      horizon: 14,
      count,
      known: count - 1,
      scoredFrom: 90,
      watchedBefore,
      switches: seed === 'none' ? new Int32Array() : at(0.04),
      unseen: new Float64Array(),
    };
    return { steps, warnings: at(0.05) };
  }

  it.each(['a', 'b', 'c', 'd', 'none'])('adds up to the score, whatever is where (%s)', (seed) => {
    const { steps, warnings } = random(seed);
    const cover = new Int32Array(steps.switches.length);
    const tally = emptyTally();
    addTally(steps, warnings, warnings.length, cover, tally);
    const found = blocksOf(steps, warnings, warnings.length, cover);
    const sum = (values: ArrayLike<number>) => Array.from(values).reduce((total, one) => total + one, 0);
    const { warned, late, missed } = tally.switches;
    expect([found.counted, found.warned, found.watched, found.spanned].map(sum)).toEqual([
      warned + late + missed,
      warned,
      tally.watched,
      tally.spanned,
    ]);
  });

  it('is what lies between the switches, looked at step by step', () => {
    const { steps, warnings } = random('a');
    const cover = new Int32Array(steps.switches.length);
    addTally(steps, warnings, warnings.length, cover, emptyTally());
    const found = blocksOf(steps, warnings, warnings.length, cover);
    const scored = [...steps.switches].filter((e) => e >= steps.scoredFrom);
    const slow = scored.map(() => ({ watched: 0, spanned: 0 }));
    for (let step = steps.scoredFrom; step < steps.count; step++) {
      if (steps.watchedBefore[step + 1] === steps.watchedBefore[step]) continue;
      // after the last switch: the first block
      const block =
        slow[
          Math.max(
            0,
            scored.findIndex((e) => e >= step),
          )
        ]!;
      block.watched++;
      if ([...warnings].some((a) => a + steps.leastLead < step && step <= a + steps.horizon)) block.spanned++;
    }
    expect([...found.watched]).toEqual(slow.map(({ watched }) => watched));
    expect([...found.spanned]).toEqual(slow.map(({ spanned }) => spanned));
    expect([...found.counted]).toEqual(scored.map((e) => Number(!isBlind(steps, e))));
  });

  it('gives, over several recordings, the difference of the scores', () => {
    const two = ['a', 'b'].map(random);
    const tallies = [emptyTally(), emptyTally()];
    const [ours, theirs] = [0, 1].map((k) =>
      joinBlocks(
        two.map(({ steps, warnings }) => {
          const said = k === 0 ? warnings : warnings.filter((_, i) => i % 2 === 0);
          const cover = new Int32Array(steps.switches.length);
          addTally(steps, said, said.length, cover, tallies[k]!);
          return blocksOf(steps, said, said.length, cover);
        }),
      ),
    );
    const { value, low, high } = skillDifference(ours!, theirs!, createRandom(1).uniform);
    expect(value).toBeCloseTo(skillOf(tallies[0]!)! - skillOf(tallies[1]!)!, 12);
    expect(low).toBeLessThan(value);
    expect(high).toBeGreaterThan(value);
  });
});
