import {
  createGrid,
  createGridBlock,
  type GridBlock,
  type GridState,
  ON_GRID,
  pushGrid,
} from '../signal/grid.ts';

/**
 * Several channels on one grid: the first channel's. The others are bridged onto its grid times, by the same rules.
 * A joint step is known once every channel has a sample at or after it; where one of them has a gap the step is left
 * out and a new run begins behind it. What comes out depends on each channel's samples alone, not on the order in
 * which the channels' frames arrive.
 */
export interface JointGridState {
  leader: GridState;
  /** steps of the leader that wait for a follower: time, newest, value, start of each, interleaved */
  waiting: number[];
  followers: FollowerState[];
  /** a step was left out since the last one */
  broken: boolean;
}

export interface FollowerState {
  /** samples not yet passed by the leader: time, value of each, interleaved */
  samples: number[];
  lastTime: number;
  lastValue: number;
  /** newest sample taken: older ones are passed over */
  newestTime: number;
}

/** Joint steps of one push; reused. `values[c]` are the values of channel c. */
export interface JointBlock {
  count: number;
  time: Float64Array;
  newest: Float64Array;
  values: Float64Array[];
  starts: Uint8Array;
  gaps: { channel: number; from: number; to: number; step: number }[];
}

/** A follower this many steps behind counts as absent: the waiting steps are given up as a gap. */
const LONGEST_WAIT = 10_000;

export function createJointGrid(channels: number, interval: number, gapIntervals: number): JointGridState {
  const followers = Array.from({ length: channels - 1 }, () => ({
    samples: [],
    lastTime: Number.NaN,
    lastValue: Number.NaN,
    newestTime: Number.NaN,
  }));
  return { leader: createGrid(interval, gapIntervals), waiting: [], followers, broken: false };
}

/**
 * Takes samples of channel `channel` and brings the joint steps that became known.
 *
 * @param leaderBlock scratch; afterwards the leader's own steps (empty when `channel` is not 0)
 * @param joint       overwritten
 */
export function pushJointGrid(
  state: JointGridState,
  channel: number,
  times: Float64Array | null,
  t0: number,
  dt: number,
  values: Float64Array,
  leaderBlock: GridBlock,
  joint: JointBlock,
): void {
  leaderBlock.count = 0;
  if (channel === 0) pushGrid(state.leader, times, t0, dt, values, leaderBlock);
  if (state.followers.length === 0) {
    passThrough(leaderBlock, joint);
    return;
  }
  joint.count = 0;
  if (joint.gaps.length > 0) joint.gaps = [];
  if (channel === 0) queueSteps(state, leaderBlock);
  else queueSamples(state.followers[channel - 1]!, times, t0, dt, values);
  resolve(state, joint);
}

/** A joint block that can be handed to `pushJointGrid`. */
export function createJointBlock(channels: number): JointBlock {
  const block = createGridBlock();
  return {
    count: 0,
    time: block.time,
    newest: block.newest,
    values: Array.from({ length: channels }, () => new Float64Array(block.time.length)),
    starts: block.starts,
    gaps: [],
  };
}

function passThrough(block: GridBlock, joint: JointBlock): void {
  joint.count = block.count;
  joint.time = block.time;
  joint.newest = block.newest;
  joint.values[0] = block.value;
  joint.starts = block.starts;
  joint.gaps = block.gaps.map((gap) => ({ channel: 0, ...gap }));
}

function queueSteps(state: JointGridState, block: GridBlock): void {
  for (let i = 0; i < block.count; i++) {
    state.waiting.push(block.time[i]!, block.newest[i]!, block.value[i]!, block.starts[i]!);
  }
  const over = state.waiting.length / 4 - LONGEST_WAIT;
  if (over > 0) {
    state.waiting.splice(0, over * 4);
    state.broken = true;
  }
}

function queueSamples(
  follower: FollowerState,
  times: Float64Array | null,
  t0: number,
  dt: number,
  values: Float64Array,
): void {
  for (let i = 0; i < values.length; i++) {
    const time = times === null ? t0 + i * dt : times[i]!;
    if (!Number.isFinite(values[i]!) || time <= follower.newestTime) continue;
    follower.newestTime = time;
    follower.samples.push(time, values[i]!);
  }
}

function resolve(state: JointGridState, joint: JointBlock): void {
  const { waiting, followers } = state;
  const found = new Float64Array(followers.length);
  let done = 0;
  for (; done < waiting.length; done += 4) {
    let newest = waiting[done + 1]!;
    let whole = true;
    let stalled = false;
    for (let f = 0; f < followers.length && !stalled; f++) {
      const at = bridge(state, followers[f]!, waiting[done]!, f, found, joint);
      if (at === undefined) stalled = true;
      else if (Number.isNaN(at)) whole = false;
      else newest = Math.max(newest, at);
    }
    if (stalled) break;
    if (waiting[done + 3] === 1) state.broken = true;
    if (!whole) {
      state.broken = true;
      continue;
    }
    putJoint(joint, waiting[done]!, newest, waiting[done + 2]!, found, state.broken);
    state.broken = false;
  }
  waiting.splice(0, done);
}

/**
 * The follower's value at `grid` into found[f]; gives the time of the sample it needed, NaN in a gap, undefined when
 * that sample has not come yet.
 */
function bridge(
  state: JointGridState,
  follower: FollowerState,
  grid: number,
  f: number,
  found: Float64Array,
  joint: JointBlock,
): number | undefined {
  const { interval, gapIntervals } = state.leader;
  const tolerance = ON_GRID * interval;
  const { samples } = follower;
  let passed = 0;
  while (passed < samples.length && samples[passed]! < grid - tolerance) passed += 2;
  if (passed > 0) {
    follower.lastTime = samples[passed - 2]!;
    follower.lastValue = samples[passed - 1]!;
    samples.splice(0, passed);
  }
  if (samples.length === 0) return undefined;
  const time = samples[0]!;
  const value = samples[1]!;
  if (time <= grid + tolerance) {
    found[f] = value;
    return time;
  }
  if (!(time - follower.lastTime <= (gapIntervals + ON_GRID) * interval)) {
    if (!state.broken && !Number.isNaN(follower.lastTime)) {
      joint.gaps.push({ channel: f + 1, from: follower.lastTime, to: time, step: joint.count });
    }
    return Number.NaN;
  }
  found[f] =
    follower.lastValue +
    ((grid - follower.lastTime) / (time - follower.lastTime)) * (value - follower.lastValue);
  return time;
}

function putJoint(
  joint: JointBlock,
  time: number,
  newest: number,
  leaderValue: number,
  found: Float64Array,
  start: boolean,
): void {
  const at = joint.count;
  if (at === joint.time.length) growJoint(joint);
  joint.time[at] = time;
  joint.newest[at] = newest;
  joint.values[0]![at] = leaderValue;
  for (let f = 0; f < found.length; f++) joint.values[f + 1]![at] = found[f]!;
  joint.starts[at] = start ? 1 : 0;
  joint.count++;
}

function growJoint(joint: JointBlock): void {
  const longer = (old: Float64Array): Float64Array => {
    const array = new Float64Array(old.length * 2);
    array.set(old);
    return array;
  };
  joint.time = longer(joint.time);
  joint.newest = longer(joint.newest);
  joint.values = joint.values.map(longer);
  const starts = new Uint8Array(joint.starts.length * 2);
  starts.set(joint.starts);
  joint.starts = starts;
}
