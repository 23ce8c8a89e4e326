import type { Trial, TrialSeen } from '../../shared-types/delivery.ts';
import type { FeedMessage } from '../../shared-types/feed.ts';
import type { Warning } from '../../shared-types/warning.ts';
import { measureDelay } from '../delay/dialog.ts';
import { createTrialNotice } from '../delay/trial.ts';
import { mark, monotonic } from '../dom.ts';
import { createDrawingData, draw } from '../drawingData.ts';
import { NOTHING_YET, reduce, withPast } from '../feedState.ts';
import { lookFor, nextLook } from '../look.ts';
import { createClock, steer, timeAt } from '../now.ts';
import { recall, remember } from '../remembered.ts';
import { act, eventsBetween } from '../requests.ts';
import { spillInk } from '../strip/ink.ts';
import { stance } from '../strip/spoken.ts';
import { type PageView, type StripView, spokenFor } from '../strip/view.ts';
import { createAttention } from './attention.ts';
import { askToShelve, explainWatching, showKeys, whoIsHere } from './dialogs.ts';
import { createFrame } from './frame.ts';
import { listenForKeys } from './keys.ts';
import type { StripPlace } from './place.ts';
import { createStrips } from './strips.ts';
import { nameOf } from './today.ts';

/** A server unheard for this long counts as lost, seconds. */
const LOST_AFTER = 2.5;

/** The Watch page: what the feed tells it goes in, what it draws of the past comes out through `ask`. */
export interface WatchPage {
  /** what another page takes the place of */
  body: HTMLElement;
  /** the name of the page that is shown, for the window's title */
  called(name: string): void;
  receive(message: FeedMessage): void;
  /** looks closely at a strip at a moment, as soon as there is one */
  lookAt(place: StripPlace): void;
  opened(): void;
  closed(): void;
}

/**
 * Mounts the page and draws it from then on.
 *
 * @param navigation the links to the pages
 * @param ask  called with what the page wants drawn, at once and at each change
 * @param echo called with what is to be said of a trial that was shown
 */
export function mountWatch(
  host: HTMLElement,
  navigation: HTMLElement,
  ask: (look: { seconds: number; columns: number }) => void,
  echo: (seen: TrialSeen) => void,
): WatchPage {
  const server = createClock();
  const attention = createAttention();
  const view: PageView = {
    state: NOTHING_YET,
    data: createDrawingData(),
    look: { seconds: Number(recall('look', '')) || 180, columns: 800 },
    zoom: null,
    readAgo: null,
    drag: null,
    monotonic: monotonic(),
    today: 0,
    lost: false,
  };
  let chosenLook = recall('look', '') !== '';
  let connected = false;
  let name = 'Watch';
  let heard = monotonic();
  const called = new Set<number>();

  const strips = createStrips(view, {
    acknowledge: (watch, upTo) => act(watch, { action: 'acknowledge', upTo, by: whoIsHere() }),
    shelve: (watch) => askToShelve(watch, nameOf(view.state, watch)),
    measureDelay: (watch) => measureDelay(watch, nameOf(view.state, watch)),
    reset: (watch) => act(watch, { action: 'reset', by: whoIsHere() }),
    putBack: (watch, from) =>
      act(watch, { action: from === 'shelved' ? 'unshelve' : 'return to service', by: whoIsHere() }),
    explainWatching,
  });
  const trials = createTrialNotice();
  const frame = createFrame(host, strips, attention, navigation, showKeys, trials.root);

  const look = (seconds: number, columns: number) => {
    if (seconds === view.look.seconds && columns === view.look.columns) return;
    view.look = { seconds, columns };
    ask(view.look);
  };
  strips.onColumns((columns) => look(view.look.seconds, columns));

  const waiting = (): StripView[] => strips.views().filter((each) => stance(each) === 'asks');
  const inHand = (): StripView | null => strips.chosen() ?? waiting()[0] ?? null;
  const shown = () => !frame.body.hidden;
  listenForKeys(shown, {
    acknowledge: () => {
      const target = [strips.chosen(), ...waiting()].find(
        (each) => each?.watch && each.warnings.length > 0 && /unacknowledged/.test(each.watch.state),
      );
      if (target?.watch)
        act(target.watch.watch, {
          action: 'acknowledge',
          upTo: target.warnings.at(-1)!.id,
          by: whoIsHere(),
        }).catch(frame.complain);
    },
    shelve: () => {
      const watch = inHand()?.watch;
      if (watch?.rule && watch.state !== 'shelved') askToShelve(watch.watch, nameOf(view.state, watch.watch));
    },
    measure: () => {
      const watch = (strips.chosen() ?? strips.views().find((each) => each.watch?.rule))?.watch;
      if (watch?.rule) measureDelay(watch.watch, nameOf(view.state, watch.watch));
    },
    move: (by) => strips.move(by),
    read: (by) => strips.read(by),
    span: (way) => {
      chosenLook = true;
      strips.live();
      look(nextLook(view.look.seconds, way), view.look.columns);
      remember('look', String(view.look.seconds));
    },
    live: () => strips.live(),
    help: showKeys,
  });

  const showTrial = async (trial: Trial) => {
    const heardAt = performance.now();
    const name = nameOf(view.state, trial.watch);
    const tone = attention.try(`A trial of ${name}, no warning`);
    echo(await trials.show(trial, name, heardAt, tone));
  };

  let wanted: StripPlace | null = null;
  const goTo = () => {
    if (wanted === null || !shown()) return;
    const { channel, at, seconds } = wanted;
    // what was warned of shows to the right of its warning
    const [from, to] = [at - 0.6 * seconds, at + 0.4 * seconds];
    if (!strips.lookAt(channel, from, to)) return;
    wanted = null;
    eventsBetween(channel, from, to).then(({ warnings, switches }) => {
      view.state = withPast(view.state, warnings, switches);
      for (const { id } of warnings) called.add(id);
      strips.paintAll();
    }, frame.complain);
  };

  const callFor = (warning: Warning) => {
    if (called.has(warning.id)) return;
    called.add(warning.id);
    const watch = view.state.watches.get(warning.watch);
    const now = timeAt(view.data.clocks.get(warning.channels[0] ?? ''), monotonic());
    if (
      watch === undefined ||
      now === null ||
      warning.quiet ||
      watch.state === 'shelved' ||
      watch.state === 'out of service' ||
      watch.use !== 'in use'
    )
      return;
    if (warning.outcome !== 'open' || now > warning.to) return;
    attention.call(warning, view.state, now);
  };

  // who asked for less motion gets paper that moves once a second, while hands are still followed at once
  const still = matchMedia('(prefers-reduced-motion: reduce)');
  const moment = () => (still.matches ? Math.floor(monotonic()) : monotonic());
  const tick = () => {
    view.monotonic = moment();
    view.today = timeAt(server, view.monotonic) ?? 0;
    view.lost = view.state.welcomed && (!connected || monotonic() - heard > LOST_AFTER);
    frame.update(view, connected, monotonic() - heard);
    goTo();
    attention.show(
      name,
      waiting().map((each) => titleOf(each)),
    );
  };
  setInterval(tick, 250);
  const animate = () => {
    requestAnimationFrame(animate);
    view.monotonic = moment();
    if (shown()) strips.animate();
  };
  requestAnimationFrame(animate);
  for (const query of ['(prefers-color-scheme: dark)', 'print']) {
    matchMedia(query).addEventListener('change', () => {
      spillInk();
      strips.paintAll();
    });
  }
  ask(view.look);

  return {
    body: frame.body,
    called: (next) => {
      name = next;
      tick();
    },
    lookAt: (place) => {
      wanted = place;
      goTo();
    },
    opened: () => {
      connected = true;
    },
    closed: () => {
      connected = false;
      tick();
    },
    receive: (message) => {
      connected = true;
      heard = monotonic();
      if (message.kind === 'beat') steer(server, message.serverTime, 0, heard);
      if (message.kind === 'welcome') {
        steer(server, message.welcome.serverTime, 0, heard);
        for (const { id } of message.welcome.warnings) called.add(id);
      }
      view.state = reduce(view.state, message);
      draw(view.data, view.state, message, view.look, heard);
      if (message.kind === 'warning') callFor(message.warning);
      if (message.kind === 'trial') void showTrial(message.trial);
      if ((message.kind === 'welcome' || message.kind === 'watch') && !chosenLook) {
        const rules = [...view.state.watches.values()].filter(
          (watch) => watch.use === 'in use' && watch.rule !== null,
        );
        look(lookFor(rules.map((watch) => watch.rule!.horizon)), view.look.columns);
      }
      mark(host, 'data-welcomed', view.state.welcomed ? 'yes' : null);
    },
  };
}

function titleOf(view: StripView): string {
  const warning = spokenFor(view)!;
  return `${view.channel.channel}: ${view.watch!.switchWord} ${view.now! < warning.from ? 'expected' : 'at any moment'}`;
}
