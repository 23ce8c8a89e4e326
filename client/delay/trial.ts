import type { Trial, TrialSeen } from '../../shared-types/delivery.ts';
import { element, mark, say } from '../dom.ts';

/** Shows trials as such, and tells how long that took. */
export interface TrialNotice {
  root: HTMLElement;
  /**
   * Shows a trial and resolves with what is to be echoed.
   *
   * @param name  of the watch
   * @param heard performance.now() when the trial came
   * @param tone  strikes the tone if it is on; resolves with performance.now() of its beginning, null when there is none
   */
  show(trial: Trial, name: string, heard: number, tone: Promise<number | null>): Promise<TrialSeen>;
}

const SHOWN_MILLISECONDS = 6000;
/** A page that has painted nothing for so long is hidden by something it cannot see. */
const PAINT_MILLISECONDS = 1000;

/** performance.now() once the next frame was painted; null: it was not. */
function painted(): Promise<number | null> {
  if (document.hidden) return Promise.resolve(null);
  return new Promise((resolve) => {
    const limit = setTimeout(resolve, PAINT_MILLISECONDS, null);
    requestAnimationFrame(() => {
      // what a frame draws is on its way to the screen by the first task after it
      const { port1, port2 } = new MessageChannel();
      port1.onmessage = () => {
        clearTimeout(limit);
        port1.close();
        resolve(performance.now());
      };
      port2.postMessage(null);
    });
  });
}

/** Creates the notice, hidden. */
export function createTrialNotice(): TrialNotice {
  const root = element('p', 'notice trialNotice');
  mark(root, 'role', 'status');
  say(root, null);
  let hiding: ReturnType<typeof setTimeout> | undefined;
  return {
    root,
    show: async (trial, name, heard, tone) => {
      say(root, `A trial of ${name}, no warning: it measures how late a warning reaches this page.`);
      clearTimeout(hiding);
      hiding = setTimeout(say, SHOWN_MILLISECONDS, root, null);
      const [seen, struck] = await Promise.all([painted(), tone]);
      const since = (moment: number | null) =>
        moment === null ? null : Math.max(0, (moment - heard) / 1000);
      return {
        trialSeen: trial.id,
        painted: since(seen),
        tone: since(struck),
        held: since(performance.now())!,
      };
    },
  };
}
