import { chargedDelay } from '../delay/words.ts';
import { button, say } from '../dom.ts';
import type { Field } from './fields.ts';
import { measuredDelay } from './requests.ts';

/** Offers the delay that was measured for a channel's watch as what every lead is charged. */
export function offerMeasuredDelay(field: Field<HTMLInputElement | HTMLSelectElement>): {
  of(channel: string): void;
} {
  let wanted = '';
  let seconds = '';
  const take = button('', 'quiet', () => {
    field.control.value = seconds;
    field.control.dispatchEvent(new Event('input'));
  });
  take.hidden = true;
  field.root.append(take);
  return {
    of(channel) {
      if (channel === wanted) return;
      wanted = channel;
      take.hidden = true;
      measuredDelay(channel).then(
        (delay) => {
          if (channel !== wanted || delay === null) return;
          seconds = chargedDelay(delay.total);
          say(take, `Charge the ${seconds} s that were measured`);
        },
        // without it a delay is written by hand
        () => undefined,
      );
    },
  };
}
