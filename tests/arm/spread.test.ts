import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { spread } from '../../src/arm/spread.ts';

describe('places spread over a box', () => {
  it('begin, in one dimension, with the multiples of 1 / golden ratio', () => {
    const { at } = spread(1);
    // 1 / 1.618034 = 0.618034; twice that less 1 is 0.236068.
    expect([at(1, 0), at(2, 0)]).toEqual([expect.closeTo(0.618_034, 6), expect.closeTo(0.236_068, 6)]);
  });

  it('leave no tenth of any side with less than half its share, wherever they begin', () => {
    fc.assert(
      fc.property(fc.integer({ min: 1, max: 8 }), fc.integer({ min: 0, max: 10_000 }), (dimensions, start) => {
        const { at } = spread(dimensions);
        for (let k = 0; k < dimensions; k++) {
          const tenths = new Float64Array(10);
          for (let n = 1; n <= 1000; n++) {
            const place = at(start + n, k);
            expect(place >= 0 && place < 1).toBe(true);
            const tenth = Math.floor(10 * place);
            tenths[tenth] = (tenths[tenth] as number) + 1;
          }
          for (const count of tenths) expect(Math.abs(count - 100)).toBeLessThan(50);
        }
      }),
      { numRuns: 30 },
    );
  });
});
