import type { RulePreview } from '../../shared-types/rehearsal.ts';
import * as requests from './requests.ts';
import type { RuleField } from './ruleField.ts';
import { switchWord } from './ruleForm.ts';
import type { SignalView } from './signalView.ts';
import { previewText, type RecordingName } from './text.ts';

/** Milliseconds without a change until a rule is asked about. */
const QUIET = 250;

export interface Asked {
  recordings: RecordingName[];
  channel: string;
  regime: string;
  regimeChannel: string;
}

/** Asks what the rule finds while it is typed, and once for each choice of recordings which rule to begin with. */
export function createPreview(of: { rule: RuleField; drawing: SignalView; asked: () => Asked }): {
  /** asks if anything has changed; `anew`: in any case */
  ask(anew?: boolean): void;
} {
  let timer: ReturnType<typeof setTimeout> | undefined;
  let running: AbortController | null = null;
  let last = '';
  let proposedFor = '';

  const askRule = async ({ recordings, channel, regime, regimeChannel }: Asked) => {
    running?.abort();
    running = new AbortController();
    const { signal } = running;
    if (regime.trim() === '') {
      of.rule.found(null);
      of.drawing.preview(null);
      return;
    }
    try {
      const previews: RulePreview[] = await Promise.all(
        recordings.map(({ name }) => requests.preview(name, regimeChannel || channel, regime, signal)),
      );
      const hours = recordings.reduce((sum, { from, to }) => sum + to - from, 0) / 3600;
      of.rule.fault(null);
      of.rule.found(previewText(previews, hours, switchWord(regime)));
      of.drawing.preview(previews);
    } catch (error) {
      if (signal.aborted) return;
      // the last good drawing stays: the rule is being written
      of.rule.fault((error as Error).message);
      of.rule.found(null);
    }
  };
  const askProposal = async ({ recordings, channel, regimeChannel }: Asked) => {
    const longest = recordings.reduce((best, each) => (each.samples > best.samples ? each : best));
    const key = `${longest.name}\n${regimeChannel || channel}`;
    if (key === proposedFor) return;
    proposedFor = key;
    of.rule.propose(undefined);
    try {
      const found = await requests.proposal(longest.name, regimeChannel || channel);
      if (key === proposedFor) of.rule.propose(found);
    } catch {
      // a proposal is a convenience: without it the rule is written by hand
      proposedFor = '';
    }
  };
  return {
    ask: (anew = false) => {
      const asked = of.asked();
      if (asked.recordings.length === 0) return;
      const key = JSON.stringify([asked.recordings.map(({ name, to }) => [name, to]), asked]);
      if (key === last && !anew) return;
      last = key;
      clearTimeout(timer);
      timer = setTimeout(() => {
        void askRule(asked);
        void askProposal(asked);
      }, QUIET);
    },
  };
}
