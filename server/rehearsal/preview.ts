import type { RulePreview } from '../../shared-types/rehearsal.ts';
import type { RegimeRule } from '../../shared-types/watch.ts';
import { createGrid, createGridBlock, pushGrid } from '../signal/grid.ts';
import { breakRegime, createRegimeState, steppedRegime, stepRegime } from '../watch/regimeRule.ts';
import type { RecordedSeries } from './playback.ts';

/**
 * What a rule calls a switch in a recorded channel, for drawing while the rule is typed. Shares are of the grid steps in
 * which the regime is known; all zero when it never is.
 *
 * @param series       the channel that the rule reads
 * @param interval     seconds between grid steps
 * @param gapIntervals the longest time without a sample that is bridged, in intervals
 * @throws RangeError in a sentence when the rule contradicts itself
 */
export function previewRule(
  { times, values }: Pick<RecordedSeries, 'times' | 'values'>,
  regime: RegimeRule,
  interval: number,
  gapIntervals: number,
): RulePreview {
  const stepped = steppedRegime(regime, interval);
  const state = createRegimeState(stepped);
  const block = createGridBlock(Math.max(64, values.length + 1));
  const bridging = regime.kind === 'marks' ? 'previous' : 'linear';
  pushGrid(createGrid(interval, gapIntervals, bridging), times, 0, 0, values, block);
  const switches: RulePreview['switches'] = [];
  const steps: number[] = Array(Math.max(2, stepped.levels.length + 1)).fill(0);
  for (let i = 0; i < block.count; i++) {
    if (block.starts[i] === 1) breakRegime(state);
    const found = stepRegime(state, stepped, block.time[i]!, block.value[i]!);
    if (found !== null) switches.push({ at: found.at, from: found.from, to: found.to });
    if (state.regime >= 0) steps[state.regime] = steps[state.regime]! + 1;
  }
  const known = steps.reduce((sum, count) => sum + count, 0);
  const hours = (block.count * interval) / 3600;
  return {
    switches,
    perHour: hours > 0 ? switches.length / hours : 0,
    shares: steps.map((count) => (known > 0 ? count / known : 0)),
  };
}
