import type uPlot from 'uplot';
import type { RulePreview } from '../../shared-types/rehearsal.ts';
import { button, element, say } from '../dom.ts';
import { gapSeconds } from '../drawingData.ts';
import { type Stretch, secondRegime } from '../regimes.ts';
import { ink } from '../strip/ink.ts';
import { dashedLevel, hatchStretches, wedges } from '../strip/marks.ts';
import { leftOutVeil } from './leftOutVeil.ts';
import { recordingColumns } from './requests.ts';
import { createRoll, type Roll, stretchText } from './roll.ts';
import { momentAt, placeOn } from './sheet.ts';
import type { RecordingName } from './text.ts';

/** What the form draws: the chosen recordings' signal, what a rule finds in it, and what is left out. */
export interface SignalView {
  root: HTMLElement;
  show(wanted: Shown): void;
  /** of each recording, in order; null: nothing is known of the rule */
  preview(previews: readonly RulePreview[] | null): void;
  leaveOut(stretches: readonly { from: number; to: number; why: string }[]): void;
}

export interface Shown {
  recordings: RecordingName[];
  channel: string;
  /** another channel that the rule reads; '' for none */
  regimeChannel: string;
  unitOf(channel: string): string;
  interval: number | null;
}

/** Creates the drawing; `leave` runs with a stretch (s) that is to be left out. */
export function createSignalView(leave: (from: number, to: number) => void): SignalView {
  let shown: Shown | null = null;
  let roll: Roll | null = null;
  let lines = '';
  let drawn = '';
  let hatched: Stretch[] = [];
  let wedged: number[] = [];
  let leftOut: readonly { from: number; to: number; why: string }[] = [];
  const words = element('span', '');
  const selected = { from: 0, to: 0 };
  const bar = element(
    'p',
    'stretchBar',
    words,
    button('Look closer', '', () => {
      roll?.look(selected.from, selected.to);
      forget();
    }),
    button('Leave it out…', '', () => {
      const sheet = roll!.sheet();
      leave(momentAt(sheet, selected.from).time, momentAt(sheet, selected.to).time);
      forget();
    }),
    button('Forget it', 'quiet', () => forget()),
  );
  bar.hidden = true;
  const host = element('div', 'signalHost');
  const forget = () => {
    bar.hidden = true;
    roll?.clearSelection();
  };

  const underSignal = (plot: uPlot) => hatchStretches(plot, hatched);
  const overSignal = (plot: uPlot) => {
    const [low, high] = [plot.scales.y!.min!, plot.scales.y!.max!];
    if (low < 0 && high > 0) dashedLevel(plot, 0, ink().edge, [1, 4]);
    wedges(plot, wedged);
    if (roll !== null) leftOutVeil(plot, roll.sheet(), leftOut);
  };
  const lineOf = (channel: string, signal: boolean) => ({
    name: () => channel,
    unit: () => shown?.unitOf(channel) ?? '',
    height: signal ? 190 : 84,
    colour: () => (signal ? ink().ink : ink().pen),
    fetch: (index: number, from: number, to: number, columns: number) =>
      recordingColumns(shown!.recordings[index]!.name, channel, from, to, columns),
    gap: (from: number, to: number, columns: number) =>
      gapSeconds(shown?.interval ?? null, { seconds: to - from, columns }),
    ...(signal ? { under: underSignal, over: overSignal } : {}),
  });

  return {
    root: element('div', 'signalView', host, bar),
    show: (wanted) => {
      const nextLines = `${wanted.channel}\n${wanted.regimeChannel}`;
      const nextDrawn = `${nextLines}\n${wanted.recordings.map(({ name, to }) => `${name} ${to}`).join('\n')}`;
      shown = wanted;
      if (nextDrawn === drawn) return;
      drawn = nextDrawn;
      hatched = [];
      wedged = [];
      bar.hidden = true;
      if (nextLines !== lines || roll === null) {
        lines = nextLines;
        const other = wanted.regimeChannel;
        roll = createRoll({
          label: `${wanted.channel}: what was recorded, with the switches that the rule finds`,
          lines: [lineOf(wanted.channel, true), ...(other === '' ? [] : [lineOf(other, false)])],
          stretched: (from, to) => {
            Object.assign(selected, { from, to });
            say(words, stretchText(roll!.sheet(), from, to));
            bar.hidden = false;
          },
        });
        host.replaceChildren(roll.root);
      }
      roll.lay(wanted.recordings);
    },
    preview: (previews) => {
      if (roll === null) return;
      const sheet = roll.sheet();
      hatched = [];
      wedged = [];
      previews?.forEach(({ switches, shares }, index) => {
        const piece = sheet.pieces[index];
        if (piece === undefined) return;
        for (const { at } of switches) wedged.push(placeOn(sheet, index, at));
        // a recording without a switch lies in one regime throughout: the one it spends its time in
        const only = switches.length === 0 ? shares.findIndex((share) => share > 0.5) : -1;
        const last = switches.at(-1)?.to ?? (only < 0 ? null : only);
        for (const { from, to } of secondRegime(switches, piece.from, piece.to, last))
          hatched.push({ from: placeOn(sheet, index, from), to: placeOn(sheet, index, to) });
      });
      roll.draw();
    },
    leaveOut: (stretches) => {
      leftOut = stretches;
      roll?.draw();
    },
  };
}
