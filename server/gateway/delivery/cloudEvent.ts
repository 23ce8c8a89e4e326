import type { DeliveryKind } from '../../../shared-types/delivery.ts';
import type { Warning } from '../../../shared-types/warning.ts';

/** Of the body of a structured-mode message in JSON (CloudEvents 1.0.2, HTTP binding, section 3.2). */
export const CLOUD_EVENTS_JSON = 'application/cloudevents+json; charset=utf-8';

/** A CloudEvent as it is sent: required attributes, some optional ones, the extension `expirytime`, and data. */
export interface CloudEvent {
  specversion: '1.0';
  id: string;
  source: string;
  type: 'foreshift.warning.issued' | 'foreshift.warning.graded' | 'foreshift.trial';
  subject: string;
  /** RFC 3339 */
  time: string;
  /** when it is of no more use; RFC 3339 */
  expirytime: string;
  datacontenttype: 'application/json';
  data: Record<string, unknown>;
}

/** What a warning's receivers should know of its watch. */
export interface WatchFacts {
  watch: string;
  name: string;
  switchWord: string;
}

const TYPES = {
  issued: 'foreshift.warning.issued',
  graded: 'foreshift.warning.graded',
  trial: 'foreshift.trial',
} as const satisfies Record<DeliveryKind, CloudEvent['type']>;

/** A URI reference that stands for the server on a machine: its name as a host's (RFC 3986, section 3.2.2). */
export const sourceOf = (machine: string): string =>
  `//${machine.replace(/[^A-Za-z0-9.-]+/g, '-') || 'localhost'}/foreshift`;

const rfc3339 = (seconds: number): string => new Date(1000 * seconds).toISOString();

/**
 * The id of what is told of a warning: the same after a crash, a replay or a failure to store it, because a watch warns
 * once at one moment. An outcome is told once.
 */
export function warningEventId({ watch, at, outcome }: Warning, kind: 'issued' | 'graded'): string {
  return `${watch}/${at}/${kind === 'issued' ? kind : outcome}`;
}

/**
 * A warning, or what became of it, as a CloudEvent.
 *
 * @param source an address that stands for this server
 * @param time   Unix seconds of what is told
 * @param until  Unix seconds
 */
export function warningEvent(
  warning: Warning,
  kind: 'issued' | 'graded',
  { name, switchWord }: WatchFacts,
  source: string,
  time: number,
  until: number,
): CloudEvent {
  return {
    specversion: '1.0',
    id: warningEventId(warning, kind),
    source,
    type: TYPES[kind],
    subject: warning.watch,
    time: rfc3339(time),
    expirytime: rfc3339(until),
    datacontenttype: 'application/json',
    data: { name, switchWord, ...warning },
  };
}

/** A trial as a CloudEvent: of a type of its own, and said to be one. */
export function trialEvent(
  trial: string,
  { watch, name }: WatchFacts,
  channels: readonly string[],
  source: string,
  time: number,
  until: number,
): CloudEvent {
  return {
    specversion: '1.0',
    id: `${watch}/${trial}/trial`,
    source,
    type: TYPES.trial,
    subject: watch,
    time: rfc3339(time),
    expirytime: rfc3339(until),
    datacontenttype: 'application/json',
    data: {
      trial: true,
      text: 'a trial by which the delay is measured, not a warning',
      watch,
      name,
      channels,
    },
  };
}
