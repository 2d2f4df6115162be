import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { despike } from '../../src/leader/despike.ts';

function medians(window: number, values: readonly number[]): number[] {
  const filter = despike([window]);
  const cell = new Float64Array(1);
  return values.map((value) => {
    cell[0] = value;
    filter.push(0, cell, cell);
    return cell[0] as number;
  });
}

describe('despike', () => {
  it('kills a spike of one reading with a window of three', () => {
    expect(medians(3, [10, 11, 12, 900, 13, 14])).toEqual([10, 10, 11, 12, 13, 14]);
  });

  it('kills a burst shorter than half the window, and lets a longer one through', () => {
    expect(medians(5, [1, 1, 1, 9, 9, 1, 1, 1]).every((m) => m === 1)).toBe(true);
    expect(medians(5, [1, 1, 1, 9, 9, 9, 1, 1, 1])).toContain(9);
  });

  it('delays a ramp by half the window and does not bend it', () => {
    const ramp = [0, 1, 2, 3, 4, 5, 6, 7, 8, 9];
    expect(medians(5, ramp).slice(4)).toEqual([2, 3, 4, 5, 6, 7]);
  });

  it('leaves an edge as sharp as it was', () => {
    expect(medians(3, [0, 0, 0, 5, 5, 5])).toEqual([0, 0, 0, 0, 5, 5]);
  });

  it('does nothing with a window of one', () => {
    expect(medians(1, [3, 900, 4])).toEqual([3, 900, 4]);
  });

  it('says values that were really read before its window is full', () => {
    // The lower middle where there are two.
    expect(medians(5, [4, 2, 8, 6])).toEqual([4, 2, 4, 4]);
  });

  it('keeps inputs of different windows apart', () => {
    const filter = despike([3, 1, 5]);
    const input = new Float64Array(3);
    const output = new Float64Array(3);
    const said: number[][] = [];
    for (const values of [
      [1, 1, 1],
      [9, 9, 9],
      [1, 1, 1],
      [1, 1, 1],
    ]) {
      input.set(values);
      for (let i = 0; i < 3; i++) filter.push(i, input, output);
      said.push([...output]);
    }
    expect(said).toEqual([
      [1, 1, 1],
      [1, 9, 1],
      [1, 1, 1],
      [1, 1, 1],
    ]);
  });

  it('is the median of the last readings, whatever they are', () => {
    const windows = fc.constantFrom(1, 3, 5, 7, 9);
    const readings = fc.array(fc.integer({ min: 0, max: 4095 }), { minLength: 1, maxLength: 40 });
    fc.assert(
      fc.property(windows, readings, (window, values) => {
        const expected = values.map((_, i) => {
          const last = values.slice(Math.max(0, i + 1 - window), i + 1).toSorted((a, b) => a - b);
          return last[(last.length - 1) >> 1];
        });
        expect(medians(window, values)).toEqual(expected);
      }),
    );
  });
});
