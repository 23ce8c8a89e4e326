import { expect, it } from 'vitest';
import { countSwings } from '../../../server/rehearsal/swings.ts';

const times = (count: number) => Float64Array.from({ length: count }, (_, i) => i);
const count = (values: number[], settings = { level: 0, deadband: 1, fall: 2 }) =>
  countSwings(times(values.length), Float64Array.from(values), settings);

it('counts visits to either side and the swings within them, by hand', () => {
  // two swings above (peaks at 1 and 3), one below (peak at 6), one above (peak at 9)
  const { visits, swings, period, above } = count([0, 5, 2, 5, 2, -2, -5, -3, 2, 5, 4]);
  expect({ visits, swings, period }).toEqual({ visits: 3, swings: 4, period: 2 });
  expect(above).toBeCloseTo(7 / 10);
});

it('takes no ripple below the fall for a swing, and no crossing within the deadband for a visit', () => {
  expect(count([0, 5, 4, 5, 4, 5, 4])).toMatchObject({ visits: 1, swings: 1 });
  expect(count([2, -0.9, 2, -0.9, 2])).toMatchObject({ visits: 1, swings: 3 });
});

it('passes over missing values and begins between the sides', () => {
  expect(count([0.5, Number.NaN, 5, Number.NaN, 2, 5])).toMatchObject({ visits: 1, swings: 2 });
  expect(count([0, 0.5, -0.5])).toMatchObject({ visits: 0, swings: 0 });
});
