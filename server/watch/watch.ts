import { createProjection, type Projection, projectInto } from '../embedding/projection.ts';
import { createValidity, type Validity, validityInto } from '../model/validity.ts';
import { createGrid, createGridBlock, type GridBlock, type GridState, pushGrid } from '../signal/grid.ts';
import {
  appendCentred,
  BLOCK_STEPS,
  createDelayLine,
  type DelayLine,
  makeRoom,
  markFull,
  packLine,
  stretchEnd,
  unpackLine,
} from './delayLine.ts';
import type { GradingSpans } from './grading.ts';
import {
  createJointBlock,
  createJointGrid,
  type JointBlock,
  type JointGridState,
  pushJointGrid,
} from './jointGrid.ts';
import { createLikeness, type LikenessState, likenessOf, stepLikeness } from './likeness.ts';
import {
  createLiveGrading,
  type LiveGradingState,
  noteSight,
  noteSwitch,
  noteUnseen,
  noteWarning,
  settle,
} from './liveGrading.ts';
import {
  breakRegime,
  createRegimeState,
  type RegimeState,
  type SteppedRegime,
  settledUntil,
  steppedRegime,
  stepRegime,
} from './regimeRule.ts';
import { checkSnapshot, copyOf, SNAPSHOT_VERSION } from './snapshot.ts';
import type { Frame, Happening, Steps, Watch, WatchSettings, WatchSnapshot } from './types.ts';
import {
  breakWatchRule,
  createWatchRuleState,
  type SteppedRule,
  steppedRule,
  stepWatchRule,
  type WatchRuleState,
} from './watchRule.ts';

/** Everything a watch remembers, as plain data. */
interface Memory {
  grid: JointGridState;
  line: DelayLine;
  rule: WatchRuleState;
  /** grid of the regime channel when it is not the first channel of the model */
  regimeGrid: GridState | null;
  regime: RegimeState | null;
  grading: LiveGradingState;
  likeness: LikenessState;
  /** warnings issued so far */
  warnings: number;
  /** newest step of the watched channels; NaN before the first */
  watched: number;
  /** the window was full at the newest step */
  sighted: boolean;
}

/** What follows from the settings and does not change. */
interface Parts {
  settings: WatchSettings;
  projection: Projection;
  rule: SteppedRule | null;
  regime: SteppedRegime | null;
  spans: GradingSpans | null;
  /** null: the model carries no limits */
  validity: Validity | null;
  /** the regime rule reads the first channel of the model */
  ownRegime: boolean;
}

/**
 * Starts a watch: an object that knows nothing of where it runs. Frames are pushed in, steps and happenings come out,
 * and a snapshot holds everything it remembers.
 *
 * @param snapshot of a watch with the same settings: goes on as if nothing had happened
 * @throws RangeError when the settings contradict themselves or the snapshot is of another version or watch
 */
export function createWatch(settings: WatchSettings, snapshot?: WatchSnapshot): Watch {
  const parts = partsOf(settings);
  const memory = snapshot === undefined ? createMemory(parts) : restore(parts, snapshot);
  const scratch = createScratch(settings.model.channels.length, settings.model.rank);
  const { model } = settings;
  return {
    push: (frame, happenings) => push(parts, memory, scratch, frame, happenings),
    sight: () => {
      const left = (model.delays - memory.line.filled) * model.interval;
      return left > 0 ? { kind: 'blind', left } : { kind: 'seeing' };
    },
    likeness: () => likenessOf(memory.likeness, parts.validity !== null && memory.grading.watchedSteps > 0),
    regimeNow: () => (memory.regime === null || memory.regime.regime === -1 ? null : memory.regime.regime),
    watchedSeconds: () => memory.grading.watchedSteps * model.interval,
    coveredSeconds: () => memory.grading.coveredSteps * model.interval,
    wants: () => [
      ...new Set([
        ...settings.channels,
        ...(settings.regimeChannel === null ? [] : [settings.regimeChannel]),
      ]),
    ],
    snapshot: () => ({
      version: SNAPSHOT_VERSION,
      delays: model.delays,
      rank: model.rank,
      memory: { ...(copyOf({ ...memory, line: null }) as Memory), line: packLine(memory.line) },
    }),
  };
}

function partsOf(settings: WatchSettings): Parts {
  const { model, channels } = settings;
  if (channels.length !== model.channels.length) {
    throw new RangeError(
      `the watch names ${channels.length} channels, the model ${model.name} has ${model.channels.length}; ` +
        `name one channel for each of ${model.channels.map((channel) => channel.channel).join(', ')}`,
    );
  }
  const rule = settings.rule === null ? null : steppedRule(settings.rule, model.interval);
  const regime = settings.regime === null ? null : steppedRegime(settings.regime, model.interval);
  return {
    settings,
    projection: createProjection(model.coordinates, channels.length, model.delays, model.rank),
    rule,
    regime,
    spans:
      rule === null ? null : { interval: model.interval, leastLead: rule.leastLead, horizon: rule.horizon },
    validity: model.validity === null ? null : createValidity(model, model.diagnostics.windows),
    ownRegime: settings.regimeChannel === null || settings.regimeChannel === channels[0],
  };
}

function createMemory(parts: Parts): Memory {
  const { model, channels, regime } = parts.settings;
  const bridging = regime?.kind === 'marks' ? 'previous' : 'linear';
  return {
    grid: createJointGrid(channels.length, model.interval, model.gapIntervals),
    line: createDelayLine(channels.length, model.delays),
    rule: createWatchRuleState(),
    regimeGrid:
      parts.regime === null || parts.ownRegime
        ? null
        : createGrid(model.interval, model.gapIntervals, bridging),
    regime: parts.regime === null ? null : createRegimeState(parts.regime),
    grading: createLiveGrading(),
    likeness: createLikeness(),
    warnings: 0,
    watched: Number.NaN,
    sighted: false,
  };
}

function restore(parts: Parts, snapshot: WatchSnapshot): Memory {
  const { model } = parts.settings;
  checkSnapshot(snapshot, model.delays, model.rank);
  const memory = copyOf(snapshot.memory) as Memory;
  return { ...memory, line: unpackLine(memory.line) };
}

interface Scratch {
  leader: GridBlock;
  joint: JointBlock;
  regime: GridBlock;
  coordinates: Float64Array;
  full: Uint8Array;
  spe: Float64Array;
  t2: Float64Array;
  steps: Steps;
}

function createScratch(channels: number, rank: number): Scratch {
  return {
    leader: createGridBlock(),
    joint: createJointBlock(channels),
    regime: createGridBlock(),
    coordinates: new Float64Array(BLOCK_STEPS * rank),
    full: new Uint8Array(BLOCK_STEPS),
    spe: new Float64Array(BLOCK_STEPS),
    t2: new Float64Array(BLOCK_STEPS),
    steps: { count: 0, time: new Float64Array(0), newest: new Float64Array(0), value: new Float64Array(64) },
  };
}

function push(parts: Parts, memory: Memory, scratch: Scratch, frame: Frame, happenings: Happening[]): Steps {
  const { settings } = parts;
  const { steps } = scratch;
  steps.count = 0;
  const channel = settings.channels.indexOf(frame.channel);
  if (channel !== -1) {
    pushJointGrid(
      memory.grid,
      channel,
      frame.times,
      frame.t0,
      frame.dt,
      frame.values,
      scratch.leader,
      scratch.joint,
    );
    takeJointSteps(parts, memory, scratch, happenings);
  }
  if (memory.regimeGrid !== null && frame.channel === settings.regimeChannel) {
    pushGrid(memory.regimeGrid, frame.times, frame.t0, frame.dt, frame.values, scratch.regime);
    takeRegimeSteps(parts, memory, scratch.regime, happenings);
  }
  return steps;
}

/** The new steps of the watched channels, block by block through the delay line, then one by one through the rules. */
function takeJointSteps(parts: Parts, memory: Memory, scratch: Scratch, happenings: Happening[]): void {
  const { joint, leader, steps } = scratch;
  steps.count = joint.count;
  steps.time = joint.time;
  steps.newest = joint.newest;
  if (steps.value.length < joint.count) steps.value = new Float64Array(joint.time.length);
  // the first channel's own grid runs ahead of the joint one when another channel lags
  const together = parts.settings.channels.length === 1;
  for (let from = 0; from < joint.count; from += BLOCK_STEPS) {
    const count = Math.min(BLOCK_STEPS, joint.count - from);
    project(parts, memory, scratch, from, count);
    for (let i = 0; i < count; i++) {
      if (together && joint.starts[from + i] === 1)
        tellLeaderGaps(parts, memory, leader, from + i, happenings);
      stepWatched(parts, memory, scratch, from, i, happenings);
      if (together && parts.ownRegime) stepRegimeChannel(parts, memory, leader, from + i, happenings);
      else settleNow(parts, memory, happenings);
    }
  }
  if (together) return;
  for (const gap of joint.gaps) {
    if (gap.channel === 0) continue;
    happenings.push({
      kind: 'gap',
      channel: parts.settings.channels[gap.channel]!,
      from: gap.from,
      to: gap.to,
    });
  }
  for (let i = 0; i < leader.count; i++) {
    if (leader.starts[i] === 1) tellLeaderGaps(parts, memory, leader, i, happenings);
    if (parts.ownRegime) stepRegimeChannel(parts, memory, leader, i, happenings);
  }
}

/** Tells the gaps that end at entry `step` of the first channel's own steps, before anything that step brings. */
function tellLeaderGaps(
  parts: Parts,
  memory: Memory,
  leader: GridBlock,
  step: number,
  happenings: Happening[],
): void {
  for (const gap of leader.gaps) {
    if (gap.step !== step) continue;
    happenings.push({ kind: 'gap', channel: parts.settings.channels[0]!, from: gap.from, to: gap.to });
    if (parts.ownRegime) noteUnseen(memory.grading, gap.from, gap.to);
  }
}

/** Steps [from, from + count) of the joint block into the delay line; coordinates and residuals of the full windows. */
function project(parts: Parts, memory: Memory, scratch: Scratch, from: number, count: number): void {
  const { joint, full, coordinates, spe, t2 } = scratch;
  const { line } = memory;
  const { rank } = parts.projection;
  makeRoom(line, count);
  parts.settings.model.channels.forEach(({ mean }, c) => {
    appendCentred(line, c, joint.values[c]!, from, count, mean);
  });
  markFull(line, joint.starts, from, count, full);
  for (let begin = 0, end = 0; begin < count; begin = end) {
    end = stretchEnd(full, begin, count);
    if (full[begin] === 0) continue;
    const newest = line.next + begin;
    const stretch = coordinates.subarray(begin * rank);
    projectInto(parts.projection, line.lines, newest, end - begin, stretch);
    if (parts.validity === null) continue;
    validityInto(
      parts.validity,
      line.lines,
      newest,
      end - begin,
      stretch,
      spe.subarray(begin),
      t2.subarray(begin),
    );
  }
  line.next += count;
}

/** One step of the watched channels: the variable, the watch rule, the likeness. */
function stepWatched(
  parts: Parts,
  memory: Memory,
  scratch: Scratch,
  from: number,
  i: number,
  happenings: Happening[],
): void {
  const { joint, steps } = scratch;
  const { model } = parts.settings;
  const time = joint.time[from + i]!;
  memory.watched = time;
  if (joint.starts[from + i] === 1) breakWatchRule(memory.rule);
  const sighted = scratch.full[i] === 1;
  const begins = !memory.sighted;
  memory.sighted = sighted;
  if (!sighted) {
    steps.value[from + i] = Number.NaN;
    return;
  }
  const level = parts.settings.rule?.variable === 'level';
  const value = level
    ? joint.values[0]![from + i]!
    : Math.abs(scratch.coordinates[(i + 1) * model.rank - 1]!);
  steps.value[from + i] = value;
  if (parts.validity !== null) {
    const { spe, t2 } = model.validity!;
    const beyond = scratch.spe[i]! > spe || scratch.t2[i]! > t2;
    if (stepLikeness(memory.likeness, time, beyond, model.delays)) {
      happenings.push({ kind: 'likeness', at: time, likeness: likenessOf(memory.likeness, true) });
    }
  }
  if (parts.rule === null || parts.spans === null) {
    memory.grading.watchedSteps++;
    return;
  }
  noteSight(memory.grading, time, begins, parts.spans);
  if (!stepWatchRule(memory.rule, parts.rule, time, value)) return;
  const at = joint.newest[from + i]!;
  const { leastLead, horizon, threshold } = parts.settings.rule!;
  happenings.push({
    kind: 'warning',
    number: memory.warnings,
    at,
    from: leastLead,
    to: horizon,
    value,
    threshold,
  });
  memory.warnings++;
  noteWarning(memory.grading, at);
}

/** The new steps of a regime channel that is not the first of the watched ones. */
function takeRegimeSteps(parts: Parts, memory: Memory, block: GridBlock, happenings: Happening[]): void {
  for (const gap of block.gaps) noteUnseen(memory.grading, gap.from, gap.to);
  for (let i = 0; i < block.count; i++) stepRegimeChannel(parts, memory, block, i, happenings);
}

/** One step of the regime channel, and whatever outcomes it settles. */
function stepRegimeChannel(
  parts: Parts,
  memory: Memory,
  block: GridBlock,
  i: number,
  happenings: Happening[],
): void {
  const { regime } = memory;
  if (regime === null || parts.regime === null) return;
  if (block.starts[i] === 1) breakRegime(regime);
  const found = stepRegime(regime, parts.regime, block.time[i]!, block.value[i]!);
  if (found !== null && parts.spans !== null) noteSwitch(memory.grading, found);
  else if (found !== null) {
    happenings.push({ kind: 'switch', ...found, outcome: 'pending', warningAt: null, lead: null });
  }
  settleNow(parts, memory, happenings);
}

function settleNow(parts: Parts, memory: Memory, happenings: Happening[]): void {
  if (parts.spans === null || parts.regime === null || memory.regime === null) return;
  settle(memory.grading, parts.spans, memory.watched, settledUntil(memory.regime, parts.regime), happenings);
}
