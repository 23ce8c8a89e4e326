import type { SwitchCard } from '../../shared-types/rehearsal.ts';

type Numbers = Float64Array | (number | null)[];
/** A card as it comes: typed arrays out of CBOR, or plain ones with null for a missing value out of JSON. */
export type SentCard = Omit<SwitchCard, 't' | 'signal' | 'value'> & {
  t: Numbers;
  signal: Numbers;
  value: Numbers;
};

/** A card with typed arrays, NaN where a value is missing. */
export function readCard(sent: SentCard): SwitchCard {
  const numbers = (list: Numbers) =>
    list instanceof Float64Array ? list : Float64Array.from(list, (value) => value ?? Number.NaN);
  return { ...sent, t: numbers(sent.t), signal: numbers(sent.signal), value: numbers(sent.value) };
}
