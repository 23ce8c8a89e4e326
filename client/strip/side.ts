import type { ChannelState } from '../../shared-types/channel.ts';
import type { WatchState } from '../../shared-types/watch.ts';
import { element, mark, say } from '../dom.ts';
import { thresholdText } from '../warningWords.ts';
import {
  badgeOf,
  channelRemarks,
  decimalsFor,
  leftOutText,
  likenessText,
  numberText,
  sightText,
  spanText,
} from '../words.ts';

/** The block left of a strip: name, value, state, model, remarks. */
export interface Side {
  root: HTMLElement;
  update(channel: ChannelState, watch: WatchState | null, several: boolean, today: number): void;
  /** `span`: the height of values on the paper, which sets the decimals */
  value(value: number | null, span: number, signed: boolean): void;
}

/** Creates the block. */
export function createSide(): Side {
  const name = element('h2', 'name');
  const label = element('p', 'label');
  const number = element('span', 'number');
  const unit = element('span', 'unit');
  const badge = element('p', 'badge');
  const remarks = element('ul', 'remarks');
  const variable = element('p', 'variable');
  const model = element('p', 'model');
  const rule = element('p', 'model');
  const verdict = element('p', 'model');
  const sight = element('p', 'sight');
  const likeness = element('p', 'model');
  const valueLine = element('p', 'value', number, ' ', unit);
  const who = element('div', 'who', name, label);
  const upper = element('div', 'upper', who, valueLine, badge, remarks);
  const lower = element('div', 'lower', variable, model, rule, verdict, sight, likeness);
  let said = '';
  return {
    root: element('div', 'side', upper, lower),
    update: (channel, watch, several, today) => {
      say(name, several && watch !== null ? `${channel.channel} · ${watch.name}` : channel.channel);
      say(label, channel.label);
      say(unit, channel.unit);
      sayBadge(badge, channel, watch);
      const words = channelRemarks(channel);
      if (watch?.rule && channel.clockOffset !== null && channel.clockOffset >= watch.rule.leastLead) {
        const late = `its data come ${spanText(channel.clockOffset)} late`;
        const plain = words.indexOf(late);
        if (plain !== -1) words.splice(plain, 1);
        words.push(`${late}: that eats the least lead of ${spanText(watch.rule.leastLead)}`);
      }
      if (words.join() !== said) {
        said = words.join();
        remarks.replaceChildren(...words.map((text) => element('li', '', text)));
      }
      say(variable, watch === null ? null : (watch.rule?.variable ?? 'forcing'));
      say(
        model,
        watch === null ? null : `model ${watch.model} · window ${spanText(watch.window)}, rank ${watch.rank}`,
      );
      say(rule, watch === null ? null : ruleText(watch, channel.unit));
      say(verdict, watch?.verdict == null ? null : `rehearsal: ${watch.verdict}`);
      mark(verdict, 'data-verdict', watch?.verdict ?? null);
      say(sight, watch === null ? null : (leftOutText(watch) ?? sightText(watch.sight)));
      say(
        likeness,
        watch === null || watch.sight.kind === 'blind' || leftOutText(watch) !== null
          ? null
          : likenessText(watch.likeness, today),
      );
      mark(likeness, 'data-likeness', watch?.likeness.kind ?? null);
    },
    value: (value, span, signed) => {
      say(number, value === null ? '–' : numberText(value, decimalsFor(span), signed));
    },
  };
}

function sayBadge(badge: HTMLElement, channel: ChannelState, watch: WatchState | null): void {
  const {
    mark: shape,
    words,
    kind,
  } = watch === null
    ? { mark: '', words: 'drawn only', kind: 'normal' }
    : watch.rule === null
      ? { mark: '', words: 'never warns', kind: 'normal' }
      : badgeOf(watch.state);
  say(badge, shape === '' ? words : `${shape} ${words}`);
  mark(badge, 'data-kind', kind);
  mark(badge, 'data-silent', channel.silent ? 'yes' : null);
}

function ruleText(watch: WatchState, unit: string): string {
  if (watch.rule === null) return 'no watch rule';
  const { threshold, direction, variable } = watch.rule;
  const latches = watch.latching ? '; latches' : '';
  return `warns ${direction === 'falling' ? 'below' : 'above'} ${thresholdText(threshold, variable, unit)}${latches}`;
}
