import type { RegimeRule, Variable, WatchRule } from '../../shared-types/watch.ts';
import { InputError } from '../signal/inputError.ts';
import { parseRegimeRule } from '../watch/regimeRuleText.ts';
import { watchRuleWithDefaults } from '../watch/watchRule.ts';

/** Rule options as `parseArgs` of node:util takes them; shared by `fit` and `rehearse`. */
export const ruleOptions = {
  regime: { type: 'string' },
  'regime-channel': { type: 'string' },
  'least-lead': { type: 'string' },
  horizon: { type: 'string' },
  threshold: { type: 'string' },
  rearm: { type: 'string' },
  'on-delay': { type: 'string' },
  'hold-off': { type: 'string' },
} as const;

/** Lines of `--help` for the rule options. */
export const ruleOptionsHelp = `rule options:
  --regime RULE          what counts as a switch: sides:LOW,HIGH  levels:A,B,...,deadband=D
                         excursion:LEVEL,REARM,GAP  dip:LEVEL,REARM,GAP  burst:WINDOW,LEVEL,REARM
                         marks:CHANNEL   each with to=up or to=down after it, if wanted
  --regime-channel NAME  the channel the rule reads (default: the first --channel)
  --least-lead S         below this many seconds a warning is too late
  --horizon S            how far ahead a warning speaks
  --threshold X          warn above this (default: chosen on the recording)
  --rearm X              armed again below this (default: 0.8 x threshold)
  --on-delay S           seconds above the threshold before a warning (default: 0)
  --hold-off S           no warning sooner after the last (default: horizon - least lead)`;

/** Rule options as given; null where the default or the data decide. Spans in seconds. */
export interface RuleChoice {
  regime: RegimeRule;
  regimeChannel: string | null;
  leastLead: number;
  horizon: number;
  threshold: number | null;
  rearm: number | null;
  onDelay: number | null;
  holdOff: number | null;
}

/** Options as `parseArgs` of node:util returns them. */
export type OptionValues = { [name: string]: string | boolean | (string | boolean)[] | undefined };

/**
 * Reads the rule options out of what `parseArgs` returned; null when none was given.
 *
 * @throws InputError when they are incomplete or contradict each other
 */
export function readRuleOptions(values: OptionValues): RuleChoice | null {
  const given = Object.keys(ruleOptions).filter((name) => values[name] !== undefined);
  if (given.length === 0) return null;
  for (const name of ['regime', 'least-lead', 'horizon']) {
    if (values[name] === undefined) {
      throw new InputError(
        'RULE_INCOMPLETE',
        `--${given[0]} is given without --${name}, a rule needs --regime, --least-lead and --horizon; add --${name}`,
      );
    }
  }
  const choice: RuleChoice = {
    regime: readRegime(String(values.regime)),
    regimeChannel: values['regime-channel'] === undefined ? null : String(values['regime-channel']),
    leastLead: numberOption(values, 'least-lead', 0)!,
    horizon: numberOption(values, 'horizon', 0)!,
    threshold: numberOption(values, 'threshold'),
    rearm: numberOption(values, 'rearm'),
    onDelay: numberOption(values, 'on-delay', 0),
    holdOff: numberOption(values, 'hold-off', 0),
  };
  if (choice.horizon <= choice.leastLead) {
    throw new InputError(
      'HORIZON_TOO_SHORT',
      `--horizon ${choice.horizon} s is not longer than --least-lead ${choice.leastLead} s, a warning speaks for the time between them; raise --horizon`,
    );
  }
  return choice;
}

/**
 * A regime rule from its text form.
 *
 * @throws InputError when it is none
 */
export function readRegime(text: string): RegimeRule {
  try {
    return parseRegimeRule(text);
  } catch (error) {
    throw new InputError('BAD_RULE', (error as Error).message);
  }
}

/** The watch rule of a choice whose threshold is known, with the defaults of the watch rule filled in. */
export function watchRuleOf(
  choice: RuleChoice,
  threshold: number,
  variable: Variable = 'forcing',
  direction: 'rising' | 'falling' = 'rising',
): WatchRule {
  const { leastLead, horizon, rearm, onDelay, holdOff } = choice;
  return watchRuleWithDefaults({
    variable,
    direction,
    threshold,
    leastLead,
    horizon,
    ...(rearm === null ? {} : { rearm }),
    ...(onDelay === null ? {} : { onDelay }),
    ...(holdOff === null ? {} : { holdOff }),
  });
}

/**
 * An option that must be a number, null when it was not given.
 *
 * @param least the smallest value accepted
 * @throws InputError when it is not a finite number or too small
 */
export function numberOption(
  values: OptionValues,
  name: string,
  least = Number.NEGATIVE_INFINITY,
): number | null {
  const text = values[name];
  if (text === undefined) return null;
  const value = typeof text === 'string' && text.trim() !== '' ? Number(text) : Number.NaN;
  if (!Number.isFinite(value) || value < least) {
    const wanted = least === Number.NEGATIVE_INFINITY ? 'a number' : `a number of at least ${least}`;
    throw new InputError(
      'BAD_OPTION',
      `--${name} is "${String(text)}", expected ${wanted}; write for example --${name} ${Math.max(least, 2)}`,
    );
  }
  return value;
}

/** As `numberOption`, and whole. */
export function wholeOption(values: OptionValues, name: string, least: number): number | null {
  const value = numberOption(values, name, least);
  if (value !== null && !Number.isInteger(value)) {
    throw new InputError(
      'BAD_OPTION',
      `--${name} is ${value}, expected a whole number; write --${name} ${Math.round(value)}`,
    );
  }
  return value;
}

/**
 * Runs a command: its exit code, or 2 with one sentence on standard error when the input was bad (InputError, an
 * option unknown to parseArgs, a file that is not there), or 1 when it failed.
 */
export async function runCommand(name: string, action: () => Promise<number>): Promise<number> {
  try {
    return await action();
  } catch (error) {
    const { code, message } = error as { code?: unknown; message?: unknown };
    const sentence = String(message ?? error).split('\n')[0];
    const badInput =
      error instanceof InputError ||
      (typeof code === 'string' && (code.startsWith('ERR_PARSE_ARGS') || code === 'ENOENT'));
    const ambiguous = /^Option '(--[\w-]+).*' argument is ambiguous/.exec(sentence ?? '');
    const remedy = ambiguous
      ? `; a value that begins with a minus sign is written with an equals sign, ${ambiguous[1]}=-1`
      : String(code).startsWith('ERR_PARSE_ARGS')
        ? `; see foreshift ${name} --help`
        : '';
    process.stderr.write(`foreshift ${name}: ${sentence}${remedy}\n`);
    return badInput ? 2 : 1;
  }
}

/** Prints one JSON document on standard output. */
export function printJson(document: unknown): void {
  process.stdout.write(`${JSON.stringify(document)}\n`);
}
