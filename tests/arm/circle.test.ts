import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { smallestCircle } from '../../src/arm/circle.ts';
import { finite } from './arms.ts';

describe('the smallest circle around points', () => {
  it('is a point, then half way between two, then through three', () => {
    expect(smallestCircle(Float64Array.of(3, 4))).toEqual({ x: 3, y: 4, radius: 0 });
    expect(smallestCircle(Float64Array.of(0, 0, 2, 0, 1, 0.5))).toEqual({ x: 1, y: 0, radius: 1 });
    // By hand: a square of side 2 about (1, 1), and a point inside.
    const square = smallestCircle(Float64Array.of(0, 0, 2, 0, 2, 2, 0, 2, 1, 1.5));
    expect(square.x).toBeCloseTo(1, 12);
    expect(square.y).toBeCloseTo(1, 12);
    expect(square.radius).toBeCloseTo(Math.SQRT2, 12);
  });

  it('holds all points, and no smaller one does', () => {
    fc.assert(
      fc.property(
        fc.array(finite(-1, 1), { minLength: 2, maxLength: 60 }),
        finite(-0.1, 0.1),
        finite(-0.1, 0.1),
        (list, dx, dy) => {
          const points = Float64Array.from(list.slice(0, list.length - (list.length % 2)));
          const { x, y, radius } = smallestCircle(points);
          const farthest = (cx: number, cy: number): number => {
            let most = 0;
            for (let k = 0; k < points.length; k += 2)
              most = Math.max(most, Math.hypot((points[k] as number) - cx, (points[k + 1] as number) - cy));
            return most;
          };
          expect(farthest(x, y)).toBeCloseTo(radius, 9);
          // The distance to the farthest point is convex: where no shift lowers it, it is lowest.
          expect(farthest(x + dx, y + dy)).toBeGreaterThanOrEqual(radius - 1e-9);
        },
      ),
    );
  });
});
