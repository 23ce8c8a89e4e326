import { describe, expect, it } from 'vitest';
import { RULE_KINDS, ruleParts, ruleText, switchWord } from '../../../client/rehearse/ruleForm.ts';
import { parseRegimeRule } from '../../../server/watch/regimeRuleText.ts';

const WRITTEN = [
  'sides:-0.8,0.8',
  'sides:-0.8,0.8,to=up',
  'excursion:5,4,2',
  'dip:1,2,0',
  'burst:3,0.5,0.3',
  'levels:1,2,deadband=0.1',
  'levels:1,2,5,to=down',
  'levels:3',
  'marks:valve 2',
];

describe('the helper for rules', () => {
  it('takes every written rule apart and writes it again as it was', () => {
    for (const text of WRITTEN) expect(ruleText(ruleParts(text)!)).toBe(text);
  });

  it('writes rules that the server reads as the same rule', () => {
    for (const text of WRITTEN)
      expect(parseRegimeRule(ruleText(ruleParts(text)!))).toEqual(parseRegimeRule(text));
    expect(
      parseRegimeRule(ruleText({ kind: 'sides', numbers: [' −0.8', '0.8 '], channel: '', to: '' })),
    ).toEqual({
      kind: 'sides',
      low: -0.8,
      high: 0.8,
    });
  });

  it('offers every kind that the server knows', () => {
    for (const { kind } of RULE_KINDS) expect(WRITTEN.some((text) => text.startsWith(`${kind}:`))).toBe(true);
    for (const { kind, numbers, directions } of RULE_KINDS) {
      const parts = {
        kind,
        numbers: numbers.map((_, i) => String(kind === 'sides' || kind === 'dip' ? i : 3 - i)),
        channel: 'x',
      };
      expect(parseRegimeRule(ruleText({ ...parts, to: '' })).kind).toBe(kind);
      if (directions) expect(parseRegimeRule(ruleText({ ...parts, to: 'down' })).to).toBe('down');
    }
  });

  it('leaves alone what it has no fields for', () => {
    expect(ruleParts('sides')).toBeNull();
    expect(ruleParts('wobble:1,2')).toBeNull();
    expect(ruleParts('sides:1,2,3')).toBeNull();
    expect(ruleParts('sides:1,2,to=left')).toBeNull();
  });

  it('keeps what is half typed', () => {
    expect(ruleParts('sides:-0.8')).toEqual({ kind: 'sides', numbers: ['-0.8', ''], channel: '', to: '' });
    expect(ruleParts('excursion:')!.numbers).toEqual(['', '', '']);
  });

  it('calls a switch by its kind', () => {
    expect(['sides:0,1', 'dip:1,2,0', 'levels:3', ''].map(switchWord)).toEqual([
      'reversal',
      'dip',
      'switch',
      'switch',
    ]);
  });
});
