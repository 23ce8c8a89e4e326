import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { type RecordToScore, scoreRecords } from '../../../server/rehearsal/score.ts';
import { createRandom } from '../../../server/rigs/random.ts';
import { type ObviousCase, obviousPerfect, obviousScore } from './obviousScore.ts';

const INTERVAL = 0.5;

/** Stretches of steps for which `flags` holds, as times of the first and last. */
function stretches(flags: boolean[], wanted: boolean): { from: number; to: number }[] {
  const found: { from: number; to: number }[] = [];
  flags.forEach((flag, step) => {
    if (flag !== wanted) return;
    if (step > 0 && flags[step - 1] === wanted) found.at(-1)!.to = step * INTERVAL;
    else found.push({ from: step * INTERVAL, to: step * INTERVAL });
  });
  return found;
}

function toRecord(given: ObviousCase): RecordToScore {
  return {
    start: 0,
    end: (given.watched.length - 1) * INTERVAL,
    known: (given.watched.length - 1) * INTERVAL,
    scoredFrom: given.scoredFrom * INTERVAL,
    switches: given.switches.map((step) => step * INTERVAL),
    warnings: given.warnings.map((step) => step * INTERVAL),
    sight: stretches(given.watched, true),
    // a gap is known by the samples before and after it
    unseen: stretches(given.seen, false).map(({ from, to }) => ({
      from: from - INTERVAL,
      to: to + INTERVAL,
    })),
  };
}

const spansOf = ({ leastLead, horizon }: ObviousCase) => ({ interval: INTERVAL, leastLead, horizon });
const score = (given: ObviousCase) => scoreRecords([toRecord(given)], spansOf(given), { uniform: null });

/** Runs of true and false of random length, so that windows fill and empty as they do live. */
const flags = fc
  .array(fc.tuple(fc.integer({ min: 1, max: 25 }), fc.integer({ min: 0, max: 5 })), {
    minLength: 2,
    maxLength: 6,
  })
  .map((runs) =>
    runs.flatMap(([on, off]) => [...Array<boolean>(on).fill(true), ...Array<boolean>(off).fill(false)]),
  );

const anyCase: fc.Arbitrary<ObviousCase> = fc
  .tuple(
    flags,
    flags,
    fc.integer({ min: 0, max: 4 }),
    fc.integer({ min: 1, max: 8 }),
    fc.infiniteStream(fc.nat(11)),
    fc.nat(15),
  )
  .map(([watched, sight, leastLead, longer, dice, scoredFrom]) => {
    const steps = watched.map((_, step) => step);
    // a gap lies between two samples, so the last step is seen
    const seen = steps.map((step) => step === steps.length - 1 || sight[step % sight.length]!);
    const roll = () => dice.next().value as number;
    return {
      leastLead,
      horizon: leastLead + longer,
      watched,
      seen,
      switches: steps.filter((step) => seen[step] && roll() === 0),
      warnings: steps.filter((step) => watched[step] && roll() < 2),
      scoredFrom,
    };
  });

const base: ObviousCase = {
  leastLead: 2,
  horizon: 5,
  watched: Array<boolean>(40).fill(true),
  seen: Array<boolean>(40).fill(true),
  switches: [],
  warnings: [],
  scoredFrom: 0,
};

describe('scoring', () => {
  it('agrees with the rules read out step by step on random cases', () => {
    fc.assert(
      fc.property(anyCase, (given) => {
        const fast = score(given);
        const slow = obviousScore(given);
        expect({ switches: fast.switches, warnings: fast.warnings }).toEqual({
          switches: slow.switches,
          warnings: slow.warnings,
        });
        expect(fast.tau).toBeCloseTo(slow.tau, 12);
        if (slow.skill === null) expect(fast.skill).toBeNull();
        else expect(fast.skill).toBeCloseTo(slow.skill, 12);
      }),
      { seed: 4711, numRuns: 1500 },
    );
  });

  it('gives the share of the perfect warner, and none when that has little skill itself', () => {
    let shares = 0;
    let withheld = 0;
    fc.assert(
      fc.property(anyCase, (given) => {
        const fast = score(given);
        const perfect = obviousScore(obviousPerfect(given)).skill;
        if (fast.skill === null || perfect === null || perfect < 0.2) {
          expect(fast.skillShare).toBeNull();
          withheld++;
        } else {
          expect(fast.skillShare).toBeCloseTo(fast.skill / perfect, 12);
          shares++;
        }
      }),
      { seed: 4712, numRuns: 800 },
    );
    expect(shares).toBeGreaterThan(100);
    expect(withheld).toBeGreaterThan(20);
  });

  it.each([
    [2, 'late', 'late'],
    [3, 'warned', 'true'],
    [5, 'warned', 'true'],
    [6, 'missed', 'false'],
    [0, 'late', 'late'],
    [-1, 'missed', 'false'],
  ] as const)(
    'takes a switch %i steps after the warning for %s with M = 2, H = 5',
    (steps, ofSwitch, ofWarning) => {
      const found = score({ ...base, warnings: [15], switches: [15 + steps] });
      expect(found.switches[ofSwitch]).toBe(1);
      expect(found.warnings[ofWarning]).toBe(1);
    },
  );

  it('calls a second warning of the same switch a repeat, and one too late for a fresh switch late', () => {
    expect(score({ ...base, warnings: [10, 11], switches: [14] }).warnings).toMatchObject({
      true: 1,
      repeat: 1,
    });
    expect(score({ ...base, warnings: [10, 14], switches: [14, 16] }).warnings).toMatchObject({
      true: 1,
      late: 1,
    });
  });

  it('leaves a warning open only when the recording ends before its span', () => {
    expect(score({ ...base, warnings: [34] }).warnings).toMatchObject({ false: 1, open: 0 });
    expect(score({ ...base, warnings: [35] }).warnings).toMatchObject({ false: 0, open: 1 });
    expect(score({ ...base, warnings: [35], switches: [39] }).warnings).toMatchObject({ true: 1, open: 0 });
  });

  it('calls a switch blind exactly when no step in [e − H, e − M) had a full window', () => {
    const watched = base.watched.map((_, step) => step >= 20);
    expect(score({ ...base, watched, switches: [22] }).switches).toMatchObject({ blind: 1, missed: 0 });
    expect(score({ ...base, watched, switches: [23] }).switches).toMatchObject({ blind: 0, missed: 1 });
    expect(score({ ...base, watched, switches: [22] }).skill).toBeNull();
  });

  it('counts the union of overlapping spans once', () => {
    const found = score({ ...base, warnings: [10, 11], switches: [14] });
    expect(found.tau).toBe(4 / 40);
    expect(found.skill).toBeCloseTo(0.9, 12);
  });

  it('lets a warning before the scored part cover a switch in it without being counted', () => {
    const found = score({ ...base, warnings: [10], switches: [14], scoredFrom: 12 });
    expect(found.switches.warned).toBe(1);
    expect(found.warnings.total).toBe(0);
    expect(found.tau).toBe(3 / 28);
  });

  it('never lets a warning of one recording cover a switch of the next', () => {
    const first = toRecord({ ...base, warnings: [38] });
    const second = { ...toRecord({ ...base, switches: [1, 20] }), start: 20, end: 39.5, known: 39.5 };
    second.switches = second.switches.map((e) => e + 20);
    second.sight = [{ from: 20, to: 39.5 }];
    const found = scoreRecords([first, second], spansOf(base), { uniform: null });
    expect(found.warnings).toMatchObject({ total: 1, open: 1, true: 0 });
    expect(found.switches).toMatchObject({ warned: 0, missed: 1, blind: 1 });
  });

  it('gives leads of the first covering warning, less the delay', () => {
    const given = { ...base, warnings: [9, 11, 20], switches: [14, 24] };
    expect(score(given).lead).toMatchObject({ median: 2.25, p10: 2.05, p90: 2.45 });
    const later = scoreRecords([toRecord(given)], spansOf(given), { uniform: null, delay: 0.25 });
    expect(later.lead.median).toBe(2);
  });

  it('gives no figures where nothing was counted', () => {
    const found = score(base);
    expect(found.detection.value).toBeNull();
    expect(found.cameTrue.value).toBeNull();
    expect(found.lead).toEqual({ median: null, p10: null, p90: null, random: null });
    expect(found.falsePerHour.low).toBe(0);
    expect(found.watchedSeconds).toBe(20);
  });
});

/** A long case in which `hits` of every ten switches are warned two steps into the covering range. */
function longCase(hits: number, seed: number): ObviousCase {
  const random = createRandom(seed);
  const count = 4000;
  const switches: number[] = [];
  for (let step = 20; step < count; step += 15 + Math.floor(random.uniform() * 20)) switches.push(step);
  const warnings = switches
    .map((e) => (random.uniform() * 10 < hits ? e - 4 : e + 6))
    .sort((a, b) => a - b)
    .filter((a) => a < count);
  const all = Array<boolean>(count).fill(true);
  return { ...base, watched: all, seen: all, switches, warnings };
}

describe('chance', () => {
  const pValue = (given: ObviousCase, seed: number) =>
    scoreRecords([toRecord(given)], spansOf(given), { uniform: createRandom(seed).uniform }).pValue!;

  it('finds warnings that know something beyond what shifting them gives', () => {
    expect(pValue(longCase(9, 1), 2)).toBeLessThan(0.01);
  });

  it('repeats itself for the same seed', () => {
    expect(pValue(longCase(2, 3), 4)).toBe(pValue(longCase(2, 3), 4));
  });

  it('is spread evenly for warnings thrown at random', () => {
    // 60 cases: about half below 0.5, five standard errors
    let low = 0;
    for (let seed = 0; seed < 60; seed++) {
      const random = createRandom(1000 + seed);
      const given = longCase(0, seed);
      const warnings = given.watched.map((_, step) => step).filter(() => random.uniform() < 0.03);
      if (pValue({ ...given, warnings }, seed) < 0.5) low++;
    }
    expect(Math.abs(low - 30)).toBeLessThan(5 * Math.sqrt(15));
  });

  it('gives the median lead of a warner that draws its steps, by simulation', () => {
    const random = createRandom('drawn');
    const given = { ...longCase(5, 8), leastLead: 5, horizon: 30 };
    const leads: number[] = [];
    for (let round = 0; round < 60; round++) {
      const drawn = new Set<number>();
      while (drawn.size < given.warnings.length)
        drawn.add(Math.floor(random.uniform() * given.watched.length));
      leads.push(...obviousScore({ ...given, warnings: [...drawn].sort((a, b) => a - b) }).leads);
    }
    leads.sort((a, b) => a - b);
    const simulated = leads[leads.length >> 1]! * INTERVAL;
    expect(Math.abs(score(given).lead.random! - simulated)).toBeLessThanOrEqual(INTERVAL);
  });
});
