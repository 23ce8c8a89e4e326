import type { DelayPart, MeasuredDelay } from '../../../shared-types/delivery.ts';
import type { FrameToStore } from '../../store/store.ts';

/** What a trial found out of one channel; times of the monotonic or server clock in seconds. */
export interface ChannelFindings {
  channel: string;
  /** the marked frame; null: none came */
  answer: { frame: FrameToStore; sentAt: number | null } | null;
  /** the newest frame since the trial began, marked or not, and when it arrived by the server's clock */
  newest: { frame: FrameToStore; arrival: number } | null;
  /** seconds from a frame's arrival until the watch had read it, of the marked one or else the newest */
  program: number | null;
  /** a ping's way there and back */
  roundTrip: number | null;
}

/** Ages beyond this are of another clock than the samples', or of a recording being played. */
const OLDEST_SECONDS = 3600;
/** Unix times from here on; below it is elapsed time, which says nothing of when it arrived */
const UNIX_FROM = 1e8;

const firstOf = ({ t0 }: FrameToStore): number => t0;
const lastOf = ({ t0, dt, times, values }: FrameToStore): number =>
  times ? times[times.length - 1]! : t0 + dt * (values.length - 1);

const plausible = (age: number): boolean => age >= 0 && age < OLDEST_SECONDS;

/** Seconds in two digits: "0.25 s", "12 s"; below a tenth in milliseconds. */
export const secondsText = (seconds: number): string =>
  Math.abs(seconds) < 0.0995
    ? `${Number((1000 * seconds).toPrecision(2))} ms`
    : `${seconds < 99.5 ? Number(seconds.toPrecision(2)) : Math.round(seconds)} s`;

const measured = (seconds: number, text: string): DelayPart => ({ seconds, how: 'measured', text });
const estimated = (seconds: number, text: string): DelayPart => ({ seconds, how: 'estimated', text });
export const notMeasured = (text: string): DelayPart => ({ seconds: null, how: 'not measured', text });

/** How long the oldest sample of a frame had waited when it was sent. */
export function rigPart({ answer, newest, roundTrip }: ChannelFindings): DelayPart {
  const frame = answer?.frame ?? newest?.frame;
  if (frame === undefined) return notMeasured('no frame came');
  const length = lastOf(frame) - firstOf(frame);
  const held =
    frame.values.length === 1
      ? 'the frame held one sample'
      : `the frame held ${secondsText(length)} of samples`;
  if (answer !== null && answer.sentAt !== null) {
    const age = answer.sentAt - lastOf(answer.frame);
    if (plausible(age))
      return measured(
        length + age,
        `${held}${frame.values.length === 1 ? '' : ', its newest'}, ${secondsText(age)} old when the producer sent it`,
      );
  }
  const why = answer === null ? 'the producer did not answer' : 'the producer did not say when it was sent';
  const offset = newest === null ? Number.NaN : newest.arrival - lastOf(newest.frame) - (roundTrip ?? 0) / 2;
  if (lastOf(frame) >= UNIX_FROM && plausible(offset))
    return estimated(
      length + offset,
      `${why}; ${held}, which arrived ${secondsText(offset)} after its newest by the two machines’ clocks`,
    );
  return estimated(length, `${why}; ${held}, how old its newest was is not known`);
}

/** Half of a ping's way there and back. */
export function networkPart({ roundTrip }: ChannelFindings): DelayPart {
  if (roundTrip === null) return notMeasured('the producer’s end of the line did not answer a ping');
  return estimated(roundTrip / 2, `half of ${secondsText(roundTrip)} there and back`);
}

export function programPart({ program }: ChannelFindings): DelayPart {
  if (program === null) return notMeasured('no frame came');
  return measured(program, 'from the frame’s arrival until the watch had read it');
}

/** What one page echoed; seconds. */
export interface PageFindings {
  /** half of what went by on the way there and back */
  way: number;
  painted: number | null;
  tone: number | null;
}

/** The slowest page's painting and tone. `sent`: pages that were told. */
export function pageParts(
  pages: readonly PageFindings[],
  sent: number,
): { page: DelayPart; tone: DelayPart } {
  const missing = sent - pages.length;
  const but =
    missing > 0 ? `; ${missing} of ${sent} pages did not answer` : sent > 1 ? `, of ${sent} pages` : '';
  const slowest = (of: 'painted' | 'tone') =>
    Math.max(...pages.flatMap((page) => (page[of] === null ? [] : [page.way + page[of]])));
  const [painted, tone] = [slowest('painted'), slowest('tone')];
  return {
    page: Number.isFinite(painted)
      ? measured(painted, `until it was painted${but}`)
      : notMeasured(sent === 0 ? 'no page is open' : `no page painted it${but || ': it is hidden'}`),
    tone: Number.isFinite(tone)
      ? measured(tone, `until it began, as the browser tells${but}`)
      : notMeasured(
          pages.length === 0
            ? 'no page answered'
            : 'it is switched off, or the browser plays nothing before it is clicked',
        ),
  };
}

/** How a warning comes to a person: by page and tone, or by webhook where no page is open. */
export function deliveryPart(
  page: DelayPart,
  tone: DelayPart,
  webhooks: MeasuredDelay['webhooks'],
): DelayPart {
  const known = (parts: readonly DelayPart[]) => parts.filter(({ seconds }) => seconds !== null);
  const slowest = (parts: readonly DelayPart[]) => Math.max(...parts.map(({ seconds }) => seconds!));
  const here = known([page, tone]);
  if (here.length > 0)
    return measured(
      slowest(here),
      here.length === 2
        ? 'page and tone, whichever is later'
        : page.seconds === null
          ? 'the tone'
          : 'the page',
    );
  const sent = known(webhooks);
  if (sent.length > 0) return measured(slowest(sent), 'no page is open; the slowest webhook');
  return notMeasured('nothing that calls a person answered');
}

/** The sum of what is known. */
export const totalOf = (parts: readonly DelayPart[]): number =>
  parts.reduce((sum, { seconds }) => sum + (seconds ?? 0), 0);
