import type { MeasuredDelay } from '../../../shared-types/delivery.ts';

const measured = (seconds: number, text = '') => ({ seconds, how: 'measured' as const, text });

export const delay = (changes: Partial<MeasuredDelay> = {}): MeasuredDelay => ({
  watch: 'a',
  trial: 't',
  at: 1_700_000_000,
  by: '',
  answered: true,
  rig: measured(0.25, 'the frame held 0.25 s of samples'),
  network: { seconds: 0.004, how: 'estimated', text: 'half of 8 ms there and back' },
  program: measured(0.001),
  delivery: measured(0.06),
  page: measured(0.06),
  tone: { seconds: null, how: 'not measured', text: 'it is switched off' },
  webhooks: [{ ...measured(0.12, 'until it answered 204'), receiver: 'bench lamp' }],
  total: 0.315,
  leastLead: 10,
  left: 9.685,
  ...changes,
});
