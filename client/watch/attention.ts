import type { Warning } from '../../shared-types/warning.ts';
import type { PageState } from '../feedState.ts';
import { recall, remember } from '../remembered.ts';
import { headline } from '../warningWords.ts';

/** Calls a person who is not looking: the page's title and icon, a tone and a notice if they were switched on. */
export interface Attention {
  tone(): boolean;
  notices(): boolean;
  canNotify(): boolean;
  toggleTone(): Promise<void>;
  toggleNotices(): Promise<void>;
  /** strikes the tone for a trial; resolves with performance.now() of its beginning, null when there is none */
  try(words: string): Promise<number | null>;
  /** title and icon for the warnings that wait for a person; `page`: the name of the page that is shown */
  show(page: string, waiting: readonly string[]): void;
  /** one new warning, once; quiet ones never get here */
  call(warning: Warning, state: PageState, now: number): void;
}

/** Creates the means of attention, as they were left at the last visit. */
export function createAttention(): Attention {
  let tone = recall('tone', 'off') === 'on';
  let notices = recall('notices', 'off') === 'on' && mayNotify();
  let sound: AudioContext | null = null;
  let shown = '';
  return {
    tone: () => tone,
    notices: () => notices,
    canNotify: () => 'Notification' in globalThis,
    toggleTone: async () => {
      tone = !tone;
      remember('tone', tone ? 'on' : 'off');
      if (tone) strike((sound ??= new AudioContext()));
    },
    toggleNotices: async () => {
      if (!notices && !mayNotify()) await Notification.requestPermission();
      notices = !notices && mayNotify();
      remember('notices', notices ? 'on' : 'off');
    },
    try: async (words) => {
      if (notices) new Notification(words, { tag: 'foreshift-trial' });
      if (!tone) return null;
      sound ??= new AudioContext();
      // a browser that was not touched yet plays nothing, and does not say so
      await Promise.race([
        sound.resume(),
        new Promise((resolve) => setTimeout(resolve, RESUME_MILLISECONDS)),
      ]);
      if (sound.state !== 'running') return null;
      strike(sound);
      const latency = TONE_SECONDS + sound.baseLatency + (sound.outputLatency || 0);
      return performance.now() + 1000 * latency;
    },
    show: (page, waiting) => {
      const title = waiting.length === 0 ? `${page} · Foreshift` : `▲ ${waiting.join(', ')} · Foreshift`;
      if (title === shown) return;
      shown = title;
      document.title = title;
      const icon = document.getElementById('icon');
      icon?.setAttribute('href', waiting.length === 0 ? '/icon.svg' : '/iconWarning.svg');
    },
    call: (warning, state, now) => {
      if (tone) strike((sound ??= new AudioContext()));
      const watch = state.watches.get(warning.watch);
      if (!notices || watch === undefined) return;
      const { what, when } = headline(warning, watch, now);
      new Notification(`${warning.channels.join(', ')}: ${what} ${when}`, { tag: `foreshift-${warning.id}` });
    },
  };
}

function mayNotify(): boolean {
  return 'Notification' in globalThis && Notification.permission === 'granted';
}

/** The tone begins so long after it is asked for, so that its first note is whole. */
const TONE_SECONDS = 0.02;
const RESUME_MILLISECONDS = 500;

/** Two soft notes, a fifth apart, within half a second. */
function strike(sound: AudioContext): void {
  void sound.resume();
  [523.25, 783.99].forEach((frequency, i) => {
    const begin = sound.currentTime + TONE_SECONDS + 0.18 * i;
    const pitch = sound.createOscillator();
    const loudness = sound.createGain();
    pitch.type = 'sine';
    pitch.frequency.value = frequency;
    loudness.gain.setValueAtTime(0, begin);
    loudness.gain.linearRampToValueAtTime(0.18, begin + 0.015);
    loudness.gain.exponentialRampToValueAtTime(0.001, begin + 0.4);
    pitch.connect(loudness).connect(sound.destination);
    pitch.start(begin);
    pitch.stop(begin + 0.42);
  });
}
