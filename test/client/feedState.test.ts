import { describe, expect, it } from 'vitest';
import { NOTHING_YET, reduce, SWITCHES_KEPT, WARNINGS_KEPT, withPast } from '../../client/feedState.ts';
import type { FeedMessage } from '../../shared-types/feed.ts';
import { delay } from './delay/fixtures.ts';
import { channel, switchAt, warning, watch } from './fixtures.ts';

const welcome: FeedMessage = {
  kind: 'welcome',
  welcome: {
    program: 'Foreshift',
    serverTime: 100,
    startedAt: 90,
    demo: false,
    ingestAddress: 'ws://127.0.0.1:4717/ingest',
    trouble: null,
    channels: [channel()],
    watches: [watch()],
    warnings: [warning()],
    switches: [switchAt(5, 0, 1), switchAt(9, 1, 0)],
  },
};

describe('what the server says becomes the page’s state', () => {
  it('knows everything a welcome says', () => {
    const state = reduce(NOTHING_YET, welcome);
    expect(state.welcomed).toBe(true);
    expect([...state.channels.keys()]).toEqual(['Loop A']);
    expect(state.watches.get('a')!.model).toBe('loop-a');
    expect(state.warnings.get(1)!.outcome).toBe('open');
    expect(state.switches.get('a')!.map(({ at }) => at)).toEqual([5, 9]);
    expect(state.ingestAddress).toBe('ws://127.0.0.1:4717/ingest');
  });

  it('forgets what a later welcome no longer names', () => {
    const grown = reduce(reduce(NOTHING_YET, welcome), {
      kind: 'channel',
      channel: channel({ channel: 'Loop B' }),
    });
    expect([...grown.channels.keys()]).toEqual(['Loop A', 'Loop B']);
    expect([...reduce(grown, welcome).channels.keys()]).toEqual(['Loop A']);
  });

  it('puts a changed warning in the place of the old one', () => {
    const state = reduce(reduce(NOTHING_YET, welcome), {
      kind: 'warning',
      warning: warning({ outcome: 'true', lead: 12 }),
    });
    expect(state.warnings.size).toBe(1);
    expect(state.warnings.get(1)!.lead).toBe(12);
  });

  it('keeps switches in time order, whatever order they come in, and each once', () => {
    let state = reduce(NOTHING_YET, welcome);
    for (const event of [switchAt(7, 1, 0), switchAt(12, 0, 1), switchAt(9, 1, 0, { outcome: 'missed' })])
      state = reduce(state, { kind: 'switch', switch: event });
    expect(state.switches.get('a')!.map(({ at }) => at)).toEqual([5, 7, 9, 12]);
    expect(state.switches.get('a')![2]!.outcome).toBe('missed');
  });

  it('changes nothing, not even the object, for drawing data and kinds it does not know', () => {
    const state = reduce(NOTHING_YET, welcome);
    expect(reduce(state, { kind: 'from the future', surprise: 1 } as unknown as FeedMessage)).toBe(state);
    const empty = new Float64Array(0);
    expect(
      reduce(state, {
        kind: 'trace',
        watch: 'a',
        columns: { t: empty, low: empty, high: empty },
        replace: true,
      }),
    ).toBe(state);
  });

  it('leaves the state it was given as it was', () => {
    const state = reduce(NOTHING_YET, welcome);
    reduce(state, { kind: 'channel', channel: channel({ channel: 'Loop B' }) });
    reduce(state, { kind: 'switch', switch: switchAt(20, 0, 1) });
    expect(state.channels.size).toBe(1);
    expect(state.switches.get('a')!.length).toBe(2);
  });

  it('says when the server cannot write and when it can again', () => {
    const troubled = reduce(NOTHING_YET, { kind: 'trouble', text: 'the disk is full' });
    expect(troubled.trouble).toBe('the disk is full');
    expect(reduce(troubled, { kind: 'trouble', text: null }).trouble).toBeNull();
  });

  it('keeps the newest measured delay of each watch, from the welcome on', () => {
    const known = reduce(NOTHING_YET, { kind: 'delay', delay: delay({ watch: 'a', trial: '1' }) });
    const both = reduce(known, { kind: 'delay', delay: delay({ watch: 'b', trial: '2' }) });
    const newer = reduce(both, { kind: 'delay', delay: delay({ watch: 'a', trial: '3' }) });
    expect([...newer.delays.values()].map(({ trial }) => trial)).toEqual(['3', '2']);
  });

  it('grows no further than its limits', () => {
    let state = NOTHING_YET;
    for (let i = 0; i < WARNINGS_KEPT + 20; i++)
      state = reduce(state, { kind: 'warning', warning: warning({ id: i }) });
    expect(state.warnings.size).toBe(WARNINGS_KEPT);
    expect(state.warnings.has(19)).toBe(false);
    for (let i = 0; i < SWITCHES_KEPT + 5; i++)
      state = reduce(state, { kind: 'switch', switch: switchAt(i, i % 2, 1 - (i % 2)) });
    expect(state.switches.get('a')!.length).toBe(SWITCHES_KEPT);
  });
});

describe('the past fetched for a close look', () => {
  it('takes its place among what is known, which it does not overwrite', () => {
    const known = reduce(NOTHING_YET, { kind: 'warning', warning: warning({ id: 7, outcome: 'true' }) });
    const state = withPast(
      known,
      [warning({ id: 7, outcome: 'open' }), warning({ id: 3 })],
      [switchAt(20, 0, 1), switchAt(10, 1, 0)],
    );
    expect([...state.warnings.keys()]).toEqual([3, 7]);
    expect(state.warnings.get(7)!.outcome).toBe('true');
    expect(state.switches.get('a')!.map(({ at }) => at)).toEqual([10, 20]);
  });
});
