import { describe, expect, it } from 'vitest';
import { fitDemo, trainingSeries } from '../../../server/commands/prepareDemo.ts';
import { cardOf, cardRange } from '../../../server/rehearsal/card.ts';
import { rehearse } from '../../../server/rehearsal/rehearse.ts';

const series = trainingSeries('Loop A', 1);
const model = fitDemo(series);
const settings = {
  model,
  channels: ['Loop A'],
  rule: model.rule,
  regime: model.regime,
  regimeChannel: null,
};
const { switches, warnings } = rehearse(settings, [[series]], { tunePart: 0.5, delay: 0, uniform: null });
const warned = switches.find(({ outcome, at }) => outcome === 'warned' && at > 600)!;
const missed = switches.find(({ outcome, at }) => outcome !== 'warned' && at > 600)!;

/** The card of a switch from the samples in its range alone. */
function card(one: (typeof switches)[number], operating = model.operating) {
  const { from, to } = cardRange(model, one.at);
  const kept = [...series.times.keys()].filter((i) => series.times[i]! >= from && series.times[i]! <= to);
  const pick = (values: Float64Array) => Float64Array.from(kept, (i) => values[i]!);
  return cardOf({
    model: { ...model, ...(operating === undefined ? {} : { operating }) },
    channels: ['Loop A'],
    series: [{ channel: 'Loop A', times: pick(series.times), values: pick(series.values) }],
    at: one.at,
    outcome: one.outcome,
    warnedAt: one.lead === null ? null : one.at - one.lead,
    lead: one.lead,
  });
}

const point = (threshold: number, falsePerHour: number) => ({
  threshold,
  rearm: 0.8 * threshold,
  falsePerHour,
  detection: 0.5,
  cameTrue: 0.5,
});

describe('the card of a switch', () => {
  it('shows three horizons before and one after, with the value that warned', () => {
    const { t, signal, value, threshold, horizon } = card(warned);
    expect(t[0]).toBeGreaterThanOrEqual(warned.at - 3 * horizon);
    expect(t[0]).toBeLessThan(warned.at - 3 * horizon + 0.5);
    expect(t.at(-1)).toBeGreaterThan(warned.at + horizon - 0.5);
    expect([signal.length, value.length]).toEqual([t.length, t.length]);
    const issued = warnings.find(({ at }) => Math.abs(at - (warned.at - warned.lead!)) < 1e-6)!;
    const nearest = t.reduce((a, b) => (Math.abs(b - issued.at) < Math.abs(a - issued.at) ? b : a));
    expect(value[t.indexOf(nearest)]).toBeGreaterThan(threshold);
    expect(value.every((one) => !Number.isNaN(one))).toBe(true);
  });

  it('names the strictest threshold that would have caught it, with its cost', () => {
    const { threshold } = model.rule!;
    const points = [point(0.5 * threshold, 9), point(threshold, 4), point(100 * threshold, 0)];
    expect(card(warned, points).catching).toEqual({ threshold, falsePerHour: 4, cameTrue: 0.5 });
  });

  it('says that no threshold would have when none would, or none is known', () => {
    expect(card(missed, [point(100 * model.rule!.threshold, 0)]).catching).toBeNull();
    expect(card(missed, undefined).catching).toBeNull();
  });

  it('asks for a rule when the model has none', () => {
    const task = { ...warned, model: { ...model, rule: null }, channels: ['Loop A'], series: [series] };
    expect(() => cardOf({ ...task, warnedAt: null })).toThrow(/no watch rule/);
  });
});
