import { describe, expect, it } from 'vitest';
import {
  checkForm,
  EMPTY_FORM,
  type FormTexts,
  numberOf,
  readForm,
} from '../../../client/rehearse/formCheck.ts';
import { RehearsalRequest } from '../../../shared-types/rehearsal.ts';

const good: FormTexts = {
  ...EMPTY_FORM,
  channel: 'Loop A',
  recordings: ['Loop A/1', 'Loop A/3'],
  regime: ' sides:-0.8,0.8 ',
  leastLead: '10',
  horizon: '20',
};
const faultsOf = (changes: Partial<FormTexts>) => checkForm({ ...good, ...changes }).faults ?? {};

describe('the form of a rehearsal', () => {
  it('becomes a request that the server takes, with nothing left to its defaults', () => {
    const { request } = checkForm({
      ...good,
      falsePerHour: '1,5',
      cameTrue: '80',
      windows: '4; 8,12',
      ranks: '5',
    });
    expect(RehearsalRequest.parse(request)).toEqual(request);
    expect(request).toMatchObject({
      recordings: ['stored:Loop A/1', 'stored:Loop A/3'],
      channels: ['Loop A'],
      regime: 'sides:-0.8,0.8',
      regimeChannel: null,
      leastLead: 10,
      horizon: 20,
      ceiling: { falsePerHour: 1.5, cameTrue: 0.8 },
      variable: 'best',
      tunePart: 0.5,
      windows: [4, 8, 12],
      ranks: [5],
    });
  });

  it('leaves a ceiling out that nobody asked for, and searches windows and ranks by itself', () => {
    expect(checkForm(good).request).toMatchObject({
      ceiling: { falsePerHour: null, cameTrue: null },
      windows: null,
      ranks: null,
    });
  });

  it('says beside each field what is wrong with it, all at once', () => {
    const faults = faultsOf({ channel: '', recordings: [], regime: ' ', leastLead: 'ten', horizon: '' });
    expect(Object.keys(faults).sort()).toEqual(['channel', 'horizon', 'leastLead', 'recordings', 'regime']);
    expect(faults.leastLead).toMatch(/“ten” is no number; expected seconds/);
    expect(faults.horizon).toMatch(/^Missing/);
  });

  it('refuses a least lead that is not shorter than the horizon', () => {
    expect(faultsOf({ leastLead: '20' }).horizon).toMatch(/must be longer than the least lead \(20 s\)/);
    expect(faultsOf({ leastLead: '19.9' })).toEqual({});
  });

  it('refuses numbers that mean nothing', () => {
    expect(faultsOf({ leastLead: '-1' }).leastLead).toMatch(/-1 cannot be used; expected seconds, 0 or more/);
    expect(faultsOf({ falsePerHour: '-2' }).falsePerHour).toMatch(/or nothing for no such limit/);
    expect(faultsOf({ cameTrue: '101' }).cameTrue).toMatch(/0 to 100/);
    expect(faultsOf({ tunePart: '5' }).tunePart).toMatch(/10 to 90/);
    expect(faultsOf({ seed: '1.5' }).seed).toMatch(/whole number/);
    expect(faultsOf({ ranks: '5, 1' }).ranks).toMatch(/“1” cannot be used/);
    expect(faultsOf({ windows: '4, x' }).windows).toMatch(/“x” cannot be used/);
  });

  it('reads numbers as people write them', () => {
    expect(['−0,5', ' 1 000 ', '1.5', '2e3'].map(numberOf)).toEqual([-0.5, 1000, 1.5, 2000]);
    expect(['', 'x', '1,2,3'].map(numberOf).every(Number.isNaN)).toBe(true);
  });

  it('is remembered, and a broken memory is an empty form', () => {
    expect(readForm(JSON.stringify(good))).toEqual(good);
    expect(readForm('')).toEqual(EMPTY_FORM);
    expect(readForm('null')).toEqual(EMPTY_FORM);
    expect(readForm('{"horizon": 20, "recordings": [1, "a"], "other": "x"}')).toEqual({
      ...EMPTY_FORM,
      recordings: ['a'],
    });
  });
});
