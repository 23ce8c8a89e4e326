import type { Subscription } from 'rxjs';
import type { Warning } from '../../../shared-types/warning.ts';
import type { WatchState } from '../../../shared-types/watch.ts';
import { createCounter } from '../counts.ts';
import type { Hub } from '../hub.ts';
import { createHistogram, type Family, family, openMetricsText } from './openMetrics.ts';

/** Numbers about the running server for `GET /metrics`. */
export interface Metrics {
  text(): string;
  /** once a second */
  tick(): void;
  close(): void;
}

/** What the hub does not know. */
export interface MetricsFacts {
  program: string;
  /** Unix seconds */
  startedAt: number;
  producers(): number;
  pages(): number;
}

const LAGS = [0.1, 0.25, 0.5, 1, 2.5, 5, 10, 30, 60];
const STATES: WatchState['state'][] = [
  'normal',
  'unacknowledged',
  'acknowledged',
  'returned to normal, unacknowledged',
  'latched, unacknowledged',
  'latched, acknowledged',
  'shelved',
  'out of service',
];

const by = (label: string, entries: Iterable<readonly [string, number]>) =>
  [...entries].map(([name, value]) => [{ [label]: name }, value] as const);

/** What has been seen since the server started. */
function createSeen(hub: Hub) {
  const seen = {
    blind: createCounter(),
    unlike: createCounter(),
    warnings: createCounter(),
    delivered: createCounter(),
    switches: createCounter(),
    graded: new Map<string, number>(),
    delivery: createHistogram(LAGS),
  };
  /** by id: what was counted of a warning that may still change */
  const open = new Map<number, { delivered: boolean; graded: boolean }>();
  let newest = 0;
  const noteWarning = ({ id, watch, madeAt, deliveredAt, outcome }: Warning) => {
    let known = open.get(id);
    if (known === undefined) {
      // one from before this start that is graded now is no new warning
      if (id > newest) {
        newest = id;
        seen.warnings.add(watch, 1);
      }
      known = { delivered: false, graded: false };
      open.set(id, known);
    }
    if (deliveredAt !== null && deliveredAt >= madeAt && !known.delivered) {
      known.delivered = true;
      seen.delivered.add(watch, 1);
      seen.delivery.add(deliveredAt - madeAt);
    }
    if (outcome !== 'open' && !known.graded) {
      known.graded = true;
      const key = JSON.stringify([watch, outcome]);
      seen.graded.set(key, (seen.graded.get(key) ?? 0) + 1);
    }
    if (open.size > 10_000) open.delete(open.keys().next().value!);
  };
  const switches = new Set<number>();
  const subscription: Subscription = hub.news$.subscribe((message) => {
    if (message.kind === 'warning') noteWarning(message.warning);
    if (message.kind === 'switch' && !switches.has(message.switch.id)) {
      switches.add(message.switch.id);
      seen.switches.add(message.switch.watch, 1);
      if (switches.size > 10_000) switches.delete(switches.values().next().value!);
    }
  });
  return { seen, close: () => subscription.unsubscribe() };
}

function serverFamilies(hub: Hub, { program, startedAt, producers, pages }: MetricsFacts): Family[] {
  const [name = '', version = ''] = program.split(' ');
  const { user, system } = process.cpuUsage();
  return [
    {
      name: 'foreshift_program',
      type: 'info',
      unit: '',
      help: 'Name and version of the program.',
      samples: [{ suffix: '_info', labels: { name, version }, value: 1 }],
    },
    family(
      'gauge',
      'foreshift_start_time_seconds',
      'When the server started, Unix time.',
      [[{}, startedAt]],
      'seconds',
    ),
    family(
      'counter',
      'foreshift_cpu_seconds',
      'Processor time used.',
      [[{}, (user + system) / 1e6]],
      'seconds',
    ),
    family('gauge', 'foreshift_memory_bytes', 'Resident memory.', [[{}, process.memoryUsage.rss()]], 'bytes'),
    family(
      'gauge',
      'foreshift_connections',
      'Open connections of producers and pages.',
      by('of', [
        ['producers', producers()],
        ['pages', pages()],
      ]),
    ),
    family('gauge', 'foreshift_store_waiting_samples', 'Samples taken and not yet on disk.', [
      [{}, hub.recorder.waiting()],
    ]),
    family('gauge', 'foreshift_trouble', '1 while something is not being recorded, else 0.', [
      [{}, hub.trouble() === null ? 0 : 1],
    ]),
  ];
}

function ingestFamilies({ counts, channels, now }: Hub): Family[] {
  const states = channels.states(now());
  const of = (value: (state: (typeof states)[number]) => number | null) =>
    states.flatMap((state) => {
      const found = value(state);
      return found === null ? [] : ([[{ channel: state.channel }, found]] as const);
    });
  return [
    family('counter', 'foreshift_ingest_frames', 'Frames taken.', by('channel', counts.frames.entries())),
    family('counter', 'foreshift_ingest_samples', 'Samples taken.', by('channel', counts.samples.entries())),
    family(
      'counter',
      'foreshift_ingest_refused',
      'Frames and hellos that were refused.',
      by('code', counts.refused.entries()),
    ),
    family(
      'counter',
      'foreshift_ingest_missing_frames',
      'Frames that producers skipped, ever.',
      of(({ holes }) => holes),
    ),
    family(
      'counter',
      'foreshift_ingest_gaps',
      'Gaps between or within frames, ever.',
      of(({ gaps }) => gaps),
    ),
    family(
      'gauge',
      'foreshift_channel_age_seconds',
      'Time since the newest frame arrived.',
      of(({ age }) => age),
      'seconds',
    ),
    family(
      'gauge',
      'foreshift_channel_lag_seconds',
      'Server clock minus the newest sample at its arrival, smoothed.',
      of(({ clockOffset }) => clockOffset),
      'seconds',
    ),
    family(
      'gauge',
      'foreshift_channel_silent',
      '1 while nothing comes, else 0.',
      of(({ silent }) => (silent ? 1 : 0)),
    ),
  ];
}

function watchFamilies({ watches, deliveries }: Hub, seen: ReturnType<typeof createSeen>['seen']): Family[] {
  const graded = [...seen.graded].map(([key, count]) => {
    const [watch, outcome] = JSON.parse(key) as [string, string];
    return [{ watch, outcome }, count] as const;
  });
  return [
    {
      name: 'foreshift_watch_state',
      type: 'stateset',
      unit: '',
      help: 'The alarm state of a watch.',
      samples: watches.states().flatMap(({ watch, state }) =>
        STATES.map((each) => ({
          suffix: '',
          labels: { watch, foreshift_watch_state: each },
          value: each === state ? 1 : 0,
        })),
      ),
    },
    family(
      'counter',
      'foreshift_watch_blind_seconds',
      'Time during which the delay window was not full, in whole seconds.',
      by('watch', seen.blind.entries()),
      'seconds',
    ),
    family(
      'counter',
      'foreshift_watch_unlike_seconds',
      'Time during which the data were unlike the model, in whole seconds.',
      by('watch', seen.unlike.entries()),
      'seconds',
    ),
    family('counter', 'foreshift_warnings', 'Warnings issued.', by('watch', seen.warnings.entries())),
    family('counter', 'foreshift_warnings_graded', 'Warnings whose outcome became known.', graded),
    family(
      'counter',
      'foreshift_warnings_delivered',
      'Warnings that a page or receiver had.',
      by('watch', seen.delivered.entries()),
    ),
    seen.delivery.family(
      'foreshift_delivery_seconds',
      'From the making of a warning until the first page or receiver had it.',
      'seconds',
    ),
    family(
      'gauge',
      'foreshift_outbox_waiting',
      'Messages to a receiver that are not delivered yet.',
      by('receiver', deliveries.waiting()),
    ),
    family('counter', 'foreshift_switches', 'Switches noted.', by('watch', seen.switches.entries())),
  ];
}

/** Counts from now on; `more` gives the families of others. */
export function createMetrics(hub: Hub, facts: MetricsFacts, more: () => Family[] = () => []): Metrics {
  const { seen, close } = createSeen(hub);
  return {
    text: () =>
      openMetricsText([
        ...serverFamilies(hub, facts),
        ...ingestFamilies(hub),
        ...watchFamilies(hub, seen),
        ...more(),
      ]),
    tick() {
      for (const { watch, use, sight, likeness } of hub.watches.states()) {
        if (use === 'taken out of use') continue;
        if (sight.kind === 'blind') seen.blind.add(watch, 1);
        else if (likeness.kind === 'unlike') seen.unlike.add(watch, 1);
      }
    },
    close,
  };
}
