import { describe, expect, it } from 'vitest';
import { type Page, pageAt } from '../../client/pages.ts';

const mount = () => ({});
const watch: Page = { name: 'Watch', path: '#/', mount: null };
const rehearse: Page = { name: 'Rehearse', path: '#/rehearse', mount };
const pages = [watch, rehearse];

describe('the page an address leads to', () => {
  it('is Watch without an address, and where the address names no page', () => {
    expect(pageAt('', pages).page).toBe(watch);
    expect(pageAt('#/', pages).page).toBe(watch);
    expect(pageAt('#/rehearsed', pages).page).toBe(watch);
  });

  it('is the page whose path it begins with, at a place within it', () => {
    expect(pageAt('#/rehearse', pages)).toEqual({ page: rehearse, place: '' });
    expect(pageAt('#/rehearse/12', pages)).toEqual({ page: rehearse, place: '12' });
    expect(pageAt('#/rehearse/Loop%20A', pages)).toEqual({ page: rehearse, place: 'Loop A' });
    expect(pageAt('#/rehearse/100%', pages).place).toBe('100%');
  });
});
