import { mkdtemp, readFile, rm } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, describe, expect, it } from 'vitest';
import { prepareDemo } from '../../../server/commands/prepareDemo.ts';

const folder = await mkdtemp(join(tmpdir(), 'foreshift-demo-'));
afterAll(() => rm(folder, { recursive: true, force: true }));
const prepared = await prepareDemo(folder);

describe('preparing the demo', () => {
  it('makes a model a loop that can be watched as it is', () => {
    expect(prepared.watches).toEqual([
      { name: 'Loop A', model: 'demo Loop A', channels: ['Loop A'], reaction: 5 },
      { name: 'Loop B', model: 'demo Loop B', channels: ['Loop B'], reaction: 5 },
    ]);
    for (const { model } of prepared.models) {
      expect(model.rule).toMatchObject({ variable: 'forcing', leastLead: 10, horizon: 20, holdOff: 10 });
      expect(model.regime?.kind).toBe('sides');
      expect(model.switchWord).toBe('reversal');
      expect(model.channels[0]!.unit).toBe('K');
    }
  });

  it('carries a score of the half that was not used for choosing, good enough to act on', () => {
    for (const { model } of prepared.models) {
      const { score } = model;
      expect(score!.switches.total).toBeGreaterThan(200);
      expect(score!.detection.low).toBeGreaterThan(0.9);
      expect(score!.cameTrue.low).toBeGreaterThan(0.85);
      expect(score!.lead.median).toBeGreaterThan(11);
      expect(score!.pValue).toBeLessThan(0.01);
    }
  });

  it('leaves the training recordings as files, with the half used named in the model', async () => {
    const text = await readFile(prepared.recordings[0]!, 'utf8');
    const lines = text.trim().split('\n');
    expect(lines[0]).toMatch(/^time.*,Loop A.*K/);
    expect(lines.length).toBeGreaterThan(53_000);
    const [used] = prepared.models[0]!.model.provenance.recordings;
    expect(used!.to).toBeCloseTo(3 * 3600, -1);
    expect(used!.sha256).toMatch(/^[0-9a-f]{64}$/);
  });

  it('uses again what an earlier start made', async () => {
    const again = await prepareDemo(folder);
    expect(again.models.map(({ json }) => json)).toEqual(prepared.models.map(({ json }) => json));
  });
});
