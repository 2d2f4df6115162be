import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import type { Stamped } from '../../src/bridge/source.ts';
import { stamps } from '../../src/bridge/stamps.ts';
import { MS } from '../plans.ts';

/** Chunks of readings by their arrival, and the stamps they get. */
function stamped(chunks: readonly { readonly atUs: number; readonly boardUs: readonly number[] }[]): number[][] {
  let told: number[] = [];
  const stamper = stamps(1, (event: Stamped) => told.push(event.tUs));
  return chunks.map(({ atUs, boardUs }) => {
    told = [];
    for (const us of boardUs) stamper.add(atUs, Float64Array.of(1), us);
    stamper.flush(atUs);
    return told;
  });
}

const NONE = Number.NaN;

describe('the stamps of readings', () => {
  it('are their arrival where each comes alone', () => {
    expect(stamped([10, 21, 29].map((ms) => ({ atUs: ms * MS, boardUs: [NONE] })))).toEqual([
      [10 * MS],
      [21 * MS],
      [29 * MS],
    ]);
  });

  it('are spread back at the median interval where they come in one chunk', () => {
    const single = [10, 20, 30, 40].map((ms) => ({ atUs: ms * MS, boardUs: [NONE] }));
    const [, , , , burst] = stamped([...single, { atUs: 80 * MS, boardUs: [NONE, NONE, NONE] }]);
    expect(burst).toEqual([60 * MS, 70 * MS, 80 * MS]);
  });

  it('find that interval from bursts alone', () => {
    const bursts = [1, 2, 3, 4, 5].map((i) => ({ atUs: i * 16 * MS, boardUs: [NONE, NONE] }));
    expect(stamped(bursts).at(-1)).toEqual([72 * MS, 80 * MS]);
  });

  it("go back by the board's own clock where it has one", () => {
    const [first] = stamped([{ atUs: 500 * MS, boardUs: [100_000, 104_000, 111_500] }]);
    expect(first).toEqual([488_500, 492_500, 500_000]);
  });

  it('are never later than their arrival, nor earlier than the chunk before, whatever the board’s clock says', () => {
    const chunk = fc.record({
      afterUs: fc.integer({ min: 0, max: 100_000 }),
      boardUs: fc.array(fc.oneof(fc.constant(NONE), fc.integer({ min: -1e9, max: 1e9 })), {
        minLength: 1,
        maxLength: 100,
      }),
    });
    fc.assert(
      fc.property(fc.array(chunk, { minLength: 1, maxLength: 10 }), (chunks) => {
        let atUs = 1_000_000;
        const arrived = chunks.map(({ afterUs, boardUs }) => ({ atUs: (atUs += afterUs), boardUs }));
        stamped(arrived).forEach((told, i) => {
          const { atUs: nowUs, boardUs } = arrived[i] as (typeof arrived)[number];
          const earliestUs = arrived[i - 1]?.atUs ?? Number.NEGATIVE_INFINITY;
          expect(told).toHaveLength(boardUs.length);
          for (const us of told) {
            expect(Number.isSafeInteger(us)).toBe(true);
            expect(us).toBeLessThanOrEqual(nowUs);
            expect(us).toBeGreaterThanOrEqual(earliestUs);
          }
        });
      }),
    );
  });

  it('leave each reading its own counts, in order, even in a chunk larger than any sane one', () => {
    const told: number[] = [];
    const stamper = stamps(1, (event) => event.kind === 'reading' && told.push(event.counts[0] as number));
    for (let i = 0; i < 200; i++) stamper.add(5 * MS, Float64Array.of(i), NONE);
    stamper.flush(5 * MS);
    expect(told).toEqual(Array.from({ length: 200 }, (_, i) => i));
  });
});
