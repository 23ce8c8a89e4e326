import type { SwitchOutcome, WarningOutcome } from './warning.ts';

/** The order in which an operating table counts what became of warnings. */
export const WARNING_OUTCOMES: readonly WarningOutcome[] = [
  'open',
  'true',
  'repeat',
  'late',
  'false',
  'unseen',
  'acted',
];

/** The order in which an operating table counts what became of switches. */
export const SWITCH_OUTCOMES: readonly SwitchOutcome[] = ['pending', 'warned', 'late', 'missed', 'blind'];
