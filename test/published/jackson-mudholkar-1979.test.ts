/**
 * J. E. Jackson, G. S. Mudholkar (1979), "Control procedures for residuals associated with principal component
 * analysis", Technometrics 21, 341–349. Worked example (ballistic missile, J. E. Jackson 1991, A User's Guide to
 * Principal Components, section 2.7, from memory): residual roots 29.33 and 16.41, Q at 5 % = 140.45; recomputed from
 * the printed roots 140.42. Companion values recomputed: one root 1: 3.74676; k equal roots: 5.93687 (2), 11.04395 (5),
 * 18.29178 (10).
 *
 * Hotelling's T² of a new observation (N. D. Tracy, J. C. Young, R. L. Mason 1992, Journal of Quality Technology 24,
 * 88–95; NIST e-Handbook 6.5.4.3.4), recomputed: m = 40, p = 4: 11.6973 (5 %), 17.2795 (1 %); m = 100, p = 10: 21.5264,
 * 28.0453.
 */
import { describe, expect, it } from 'vitest';
import { distanceLimit, residualLimit } from '../../server/model/validity.ts';
import { fQuantile, normalQuantile } from '../../server/signal/quantiles.ts';

describe('limits of validity', () => {
  it('give the residual limit of the worked example', () => {
    expect(Math.abs(residualLimit(Float64Array.of(29.33, 16.41), 0.95) - 140.45)).toBeLessThan(0.05);
  });

  it.each([
    [1, 3.74676],
    [2, 5.93687],
    [5, 11.04395],
    [10, 18.29178],
  ])('give the residual limit of %i equal roots', (count, limit) => {
    expect(Math.abs(residualLimit(new Float64Array(count).fill(1), 0.95) - limit)).toBeLessThan(6e-6);
  });

  it.each([
    [40, 4, 0.95, 11.6973],
    [40, 4, 0.99, 17.2795],
    [100, 10, 0.95, 21.5264],
    [100, 10, 0.99, 28.0453],
  ])('give the distance limit for %i observations of rank %i at %f', (m, p, within, limit) => {
    expect(Math.abs(distanceLimit(p, m, within) - limit)).toBeLessThan(6e-5);
  });

  it('rest on the quantiles of the normal and the F law', () => {
    expect(Math.abs(normalQuantile(0.95) - 1.64485)).toBeLessThan(5e-6);
    expect(Math.abs(normalQuantile(0.001) + normalQuantile(0.999))).toBeLessThan(1e-12);
    expect(Math.abs(fQuantile(0.95, 2, 13) - 3.80557)).toBeLessThan(5e-6);
  });
});
