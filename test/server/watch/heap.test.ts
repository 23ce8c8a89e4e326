import { setFlagsFromString } from 'node:v8';
import { runInNewContext } from 'node:vm';
import { expect, it } from 'vitest';
import { fitModel } from '../../../server/model/fit.ts';
import { lorenzSeries } from '../../../server/rigs/lorenz.ts';
import { parseRegimeRule } from '../../../server/watch/regimeRuleText.ts';
import type { Happening } from '../../../server/watch/types.ts';
import { createWatch } from '../../../server/watch/watch.ts';
import { watchRuleWithDefaults } from '../../../server/watch/watchRule.ts';

setFlagsFromString('--expose_gc');
const collect = runInNewContext('gc') as () => void;

it('leaves the heap flat over a million samples: what a watch remembers does not grow', () => {
  const values = lorenzSeries({ start: [-8, 8, 27], step: 0.01, every: 2, samples: 20_000 });
  const model = fitModel([[values]], 0.02, {
    name: 'loop',
    channels: [{ channel: 'x', unit: '' }],
    delays: 12,
    rank: 4,
    center: 'mean',
    gapIntervals: 3,
  });
  const watch = createWatch({
    model,
    channels: ['x'],
    rule: watchRuleWithDefaults({ variable: 'forcing', threshold: 1.5, leastLead: 0.2, horizon: 0.7 }),
    regime: parseRegimeRule('sides:-0.8,0.8'),
    regimeChannel: null,
  });
  let warnings = 0;
  const frame = { channel: 'x', t0: 0, dt: 0.02, times: null, values: new Float64Array(0) as Float64Array };
  const push = (from: number, to: number) => {
    const happenings: Happening[] = [];
    for (let i = from; i < to; i += 100) {
      frame.t0 = i * 0.02;
      frame.values = values.subarray(i % 20_000, (i % 20_000) + 100);
      watch.push(frame, happenings);
      warnings += happenings.reduce((count, { kind }) => count + (kind === 'warning' ? 1 : 0), 0);
      happenings.length = 0;
    }
    collect();
    return process.memoryUsage().heapUsed;
  };
  const before = push(0, 200_000);
  const after = push(200_000, 1_200_000);
  expect(warnings).toBeGreaterThan(5000);
  expect(after - before).toBeLessThan(200_000);
});
