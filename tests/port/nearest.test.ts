import { describe, expect, it } from 'vitest';
import { nearest } from '../../src/port/nearest.ts';

describe('the nearest known word', () => {
  it.each([
    ['buad', 'baud', 'two neighbours swapped'],
    ['bau', 'baud', 'a letter dropped'],
    ['bauds', 'baud', 'a letter too many'],
    ['Baud', 'baud', 'another case'],
    ['ofset_deg', 'offset_deg', 'a letter dropped from a long word'],
    ['offest_degs', 'offset_deg', 'two slips in a long word'],
  ])('of %s is %s: %s', (word, known) => {
    expect(nearest(word, ['gain', 'offset_deg', 'baud'])).toBe(known);
  });

  it.each(['parity', 'x', '', 'gradient'])('of %j is none', (word) => {
    expect(nearest(word, ['gain', 'offset_deg', 'baud'])).toBeNull();
  });

  it('is the nearest of several, and the first of equals', () => {
    expect(nearest('speeds', ['seeds', 'speed_s', 'speed'])).toBe('seeds');
    expect(nearest('speed', ['seed', 'speed'])).toBe('speed');
  });
});
