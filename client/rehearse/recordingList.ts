import { element, mark, say } from '../dom.ts';
import { type RecordingName, recordingText } from './text.ts';

/** Recordings of a channel, to be ticked. */
export interface RecordingList {
  root: HTMLElement;
  offer(recordings: readonly RecordingName[], ticked: readonly string[]): void;
  fault(sentence: string | null): void;
}

/** Creates the list; `changed` is told the names that are ticked. */
export function createRecordingList(changed: (names: string[]) => void): RecordingList {
  const list = element('div', 'recordingList');
  const legend = element('legend', 'fieldName', 'Recordings');
  const help = element(
    'p',
    'fieldHelp',
    'One or several; the earlier part chooses the settings, the later part judges them.',
  );
  const faultLine = element('p', 'fieldFault');
  say(faultLine, null);
  const root = element('fieldset', 'rehearseField recordings', legend, list, help, faultLine);
  const boxes = () => [...list.querySelectorAll('input')];
  return {
    root,
    offer: (recordings, ticked) => {
      const today = Math.max(0, ...recordings.map(({ to }) => to));
      const newest = [...recordings].sort((a, b) => b.from - a.from);
      list.replaceChildren(
        ...newest.map((recording) => {
          const box = element('input');
          box.type = 'checkbox';
          box.value = recording.name;
          box.checked = ticked.includes(recording.name);
          box.addEventListener('change', () =>
            changed(
              boxes()
                .filter(({ checked }) => checked)
                .map(({ value }) => value),
            ),
          );
          return element('label', 'recording', box, element('span', '', recordingText(recording, today)));
        }),
      );
    },
    fault: (sentence) => {
      say(faultLine, sentence);
      for (const box of boxes()) mark(box, 'aria-invalid', sentence === null ? null : 'true');
    },
  };
}
