import { describe, expect, it } from 'vitest';
import { actionOf, type KeyActions } from '../../../client/watch/keys.ts';

function pressed(key: string): string[] {
  const done: string[] = [];
  const note = (name: string) => (way?: unknown) =>
    void done.push(way === undefined ? name : `${name} ${way}`);
  const actions: KeyActions = {
    acknowledge: note('acknowledge'),
    shelve: note('shelve'),
    measure: note('measure'),
    move: note('move'),
    read: note('read'),
    span: note('span'),
    live: note('live'),
    help: note('help'),
  };
  actionOf(key, actions)?.();
  return done;
}

describe('the keys', () => {
  it('do what the list of keys says', () => {
    expect(
      [
        'a',
        'S',
        'D',
        'j',
        'ArrowDown',
        'K',
        'ArrowUp',
        'ArrowLeft',
        'ArrowRight',
        '+',
        '-',
        'Escape',
        '?',
      ].flatMap(pressed),
    ).toEqual([
      'acknowledge',
      'shelve',
      'measure',
      'move 1',
      'move 1',
      'move -1',
      'move -1',
      'read -1',
      'read 1',
      'span shorter',
      'span longer',
      'live',
      'help',
    ]);
  });

  it('leave every other key to the browser', () => {
    expect(['Tab', 'Enter', ' ', 'F5', 'x'].flatMap(pressed)).toEqual([]);
  });
});
