import { InputError } from '../signal/inputError.ts';
import type { RecordedChannel, Recording } from './recording.ts';

/**
 * The channel of a recording with that name.
 *
 * @throws InputError NO_SUCH_CHANNEL with the names there are
 */
export function pickChannel(recording: Recording, name: string): RecordedChannel {
  const found = recording.channels.find(({ channel }) => channel === name);
  if (found !== undefined) return found;
  const names = recording.channels.map(({ channel }) => `"${channel}"`).join(', ');
  throw new InputError(
    'NO_SUCH_CHANNEL',
    `${recording.name} has no channel "${name}"; it has ${names}; name one of these with --channel`,
  );
}
