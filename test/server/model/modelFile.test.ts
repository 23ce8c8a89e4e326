import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { decodeFloats, encodeFloats } from '../../../server/model/base64.ts';
import { fitModel } from '../../../server/model/fit.ts';
import { modelFromJson, modelToJson } from '../../../server/model/modelFile.ts';
import { summarise } from '../../../server/model/summary.ts';
import { createRandom } from '../../../server/rigs/random.ts';
import type { InputError } from '../../../server/signal/inputError.ts';

const { gaussian } = createRandom(2);
const signal = Float64Array.from(
  { length: 900 },
  (_, i) => Math.sin(0.2 * i) + 0.3 * Math.sin(0.53 * i) + 0.02 * gaussian(),
);
const model = fitModel([[signal]], 0.1, {
  name: 'two tones',
  channels: [{ channel: 'x', unit: 'V' }],
  delays: 10,
  rank: 4,
  center: 'mean',
  gapIntervals: 3,
});
const rule = {
  variable: 'forcing',
  direction: 'rising',
  threshold: 2,
  rearm: 1.6,
  onDelay: 0,
  holdOff: 10,
  leastLead: 10,
  horizon: 20,
} as const;
const complete = { ...model, rule, regime: { kind: 'sides', low: -1, high: 1 } as const, regimeChannel: 'x' };

const codeOf = (text: string): string => {
  try {
    modelFromJson(text);
  } catch (error) {
    expect((error as Error).message).not.toContain('\n');
    return (error as InputError).code;
  }
  return 'none';
};

const changed = (changes: { [key: string]: unknown }): string =>
  JSON.stringify({ ...JSON.parse(modelToJson(complete)), ...changes });

describe('a model file', () => {
  it('gives back every bit of the model', () => {
    expect(modelFromJson(modelToJson(complete))).toEqual(complete);
    expect(modelFromJson(modelToJson(model))).toEqual(model);
  });

  it('carries the operating points of a rehearsal, and none when there are none', () => {
    const known = { threshold: 1.5, rearm: 1.2, falsePerHour: 0.7, detection: 0.9, cameTrue: 0.8 };
    const unknown = { threshold: 9, rearm: 7, falsePerHour: null, detection: null, cameTrue: null };
    const rehearsed = { ...complete, operating: [known, unknown] };
    expect(modelFromJson(modelToJson(rehearsed))).toEqual(rehearsed);
    expect(modelFromJson(modelToJson(complete))).not.toHaveProperty('operating');
  });

  it('encodes numbers as little-endian float64 in base64, as a common decoder reads them', () => {
    const values = Float64Array.of(1, -0, Math.PI, 5e-324, 1.7976931348623157e308);
    const bytes = Buffer.from(encodeFloats(values), 'base64');
    expect(bytes.length).toBe(40);
    for (const [i, value] of values.entries()) expect(Object.is(bytes.readDoubleLE(8 * i), value)).toBe(true);
    for (let length = 0; length < 5; length++) {
      expect(decodeFloats(encodeFloats(values.slice(0, length)))).toEqual(values.slice(0, length));
    }
    expect(decodeFloats('AAA')).toBeNull();
    expect(decodeFloats('not base64!!')).toBeNull();
  });

  it('of version 1 is still read', () => {
    const old = modelFromJson(
      readFileSync(new URL('../../data/model-version-1.json', import.meta.url), 'utf8'),
    );
    expect(old.delays).toBe(6);
    expect(old.rank).toBe(3);
    expect(old.coordinates.length).toBe(18);
    expect(old.rule!.horizon).toBe(20);
    // older than operating points
    expect(old).not.toHaveProperty('operating');
  });

  it.each([
    ['MODEL_DAMAGED', modelToJson(complete).slice(0, 500)],
    ['MODEL_DAMAGED', ''],
    ['MODEL_DAMAGED', changed({ A: 'AAAA' })],
    ['MODEL_DAMAGED', changed({ coordinates: encodeFloats(new Float64Array(3)) })],
    ['MODEL_DAMAGED', changed({ B: encodeFloats(Float64Array.of(1, Number.NaN, 2)) })],
    ['MODEL_DAMAGED', changed({ channels: [] })],
    ['MODEL_DAMAGED', changed({ rule: { variable: 'forcing' } })],
    ['MODEL_DAMAGED', changed({ version: 'one' })],
    ['MODEL_DAMAGED', changed({ interval: null })],
    ['MODEL_DAMAGED', changed({ diagnostics: null })],
    ['MODEL_DAMAGED', changed({ operating: [{ threshold: 'high' }] })],
    ['NOT_A_MODEL', '{"some": "other document"}'],
    ['NOT_A_MODEL', 'null'],
    ['MODEL_NEWER', changed({ version: 2 })],
  ])('is refused with %s in one sentence', (code, text) => {
    expect(codeOf(text)).toBe(code);
  });
});

describe('the summary of a fit', () => {
  it('has plain numbers and matrices as rows', () => {
    const summary = JSON.parse(JSON.stringify(summarise(complete)));
    expect(summary.coordinates.length).toBe(10);
    expect(summary.coordinates[3]).toEqual([...model.coordinates.slice(12, 16)]);
    expect(summary.A.length).toBe(3);
    expect(summary.A[1]).toEqual([...model.A.slice(3, 6)]);
    expect(summary.B).toEqual([...model.B]);
    expect(summary.mean).toBe(model.channels[0]!.mean);
    for (const key of [
      'interval',
      'delays',
      'rank',
      'samples',
      'singularValues',
      'forcing',
      'r2',
      'method',
      'seconds',
    ]) {
      expect(summary[key]).toBeDefined();
    }
  });

  it('carries the verdict of its rehearsal, which older files lack, and refuses one it does not know', () => {
    const verdict = { kind: 'no better than', than: 'a clock' } as const;
    const text = modelToJson({ ...complete, verdict });
    expect(modelFromJson(text).verdict).toEqual(verdict);
    expect(modelFromJson(modelToJson(complete))).not.toHaveProperty('verdict');
    expect(codeOf(text.replace('no better than', 'splendid'))).toBe('MODEL_DAMAGED');
  });
});
