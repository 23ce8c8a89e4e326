import type { ChannelState } from '../../shared-types/channel.ts';
import type { ModelEvidence, ModelSummary } from '../../shared-types/model.ts';
import type { NewWatchToSend, WatchState } from '../../shared-types/watch.ts';
import { ask, send } from '../requests.ts';

/** Everything the list needs. @throws Error with the server's own sentence */
export async function surroundings(): Promise<{
  models: ModelSummary[];
  watches: WatchState[];
  channels: ChannelState[];
}> {
  const [models, watches, channels] = await Promise.all([
    ask('/api/models'),
    ask('/api/watches'),
    ask('/api/channels'),
  ]);
  return {
    models: models as ModelSummary[],
    watches: watches as WatchState[],
    channels: channels as ChannelState[],
  };
}

/** What a model is judged by. @throws Error with the server's own sentence */
export async function evidenceOf(name: string): Promise<ModelEvidence> {
  return (await ask(`/api/models/${encodeURIComponent(name)}/evidence`)) as ModelEvidence;
}

/** Puts a watch in use, on trial or out of use. @throws Error with the server's own sentence */
export async function setUse(watch: string, use: WatchState['use']): Promise<void> {
  await send(`/api/watches/${encodeURIComponent(watch)}/use`, { use });
}

/** Begins a watch with a model. @throws Error with the server's own sentence */
export async function beginWatch(wanted: NewWatchToSend): Promise<void> {
  await send('/api/watches', wanted);
}
