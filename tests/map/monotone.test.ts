import { describe, expect, it } from 'vitest';
import { compileMap } from '../../src/map/compile.ts';
import { monotoneSlopes } from '../../src/map/monotone.ts';

describe('slopes through monotone points', () => {
  it('are the secant everywhere where the points lie on a line', () => {
    expect([...monotoneSlopes(Float64Array.of(0, 1, 3), Float64Array.of(1, 3, 7))]).toEqual([2, 2, 2]);
  });

  it('are the mean of the neighbouring secants inside, the end secants at the ends', () => {
    // By hand: secants 1 and 2 over unit segments; 1.5^2 + 1^2 and 0.75^2 + 1^2 lie inside the circle of radius 3.
    expect([...monotoneSlopes(Float64Array.of(0, 1, 2), Float64Array.of(0, 1, 3))]).toEqual([1, 1.5, 2]);
  });

  it('are pulled back into the circle of radius 3 where a cubic could turn', () => {
    // By hand: secants 1 and 9, mean 5. First segment: (1, 5) has radius sqrt(26) > 3, so both shrink by 3 / sqrt(26);
    // second: (5 * 3 / sqrt(26) / 9, 1) is inside.
    const pull = 3 / Math.sqrt(26);
    const [first, second, third] = monotoneSlopes(Float64Array.of(0, 1, 2), Float64Array.of(0, 1, 10));
    expect(first).toBeCloseTo(pull, 14);
    expect(second).toBeCloseTo(5 * pull, 14);
    expect(third).toBe(9);
  });

  it('are flat where the points turn or stand', () => {
    expect([...monotoneSlopes(Float64Array.of(0, 1, 2), Float64Array.of(0, 1, 0))]).toEqual([1, 0, -1]);
    expect([...monotoneSlopes(Float64Array.of(0, 1, 2), Float64Array.of(0, 0, 1))]).toEqual([0, 0, 1]);
  });

  it('mirror when the points do', () => {
    const x = Float64Array.of(0, 1, 2.5, 4, 4.5);
    const y = Float64Array.of(0, 0.1, 3, 3.2, 7);
    const rising = monotoneSlopes(x, y);
    const falling = monotoneSlopes(
      x,
      y.map((v) => -v),
    );
    falling.forEach((slope, i) => expect(slope).toBeCloseTo(-(rising[i] as number), 12));
  });
});

describe('a monotone map', () => {
  it('has its slope without a corner at a point, which a straight one has not', () => {
    const points: [number, number][] = [
      [0, 0],
      [1, 1],
      [2, 3],
    ];
    const corner = (curve: 'straight' | 'monotone'): number => {
      const map = compileMap(points, curve, 'extend');
      const h = 1e-6;
      return (map.value(1 + h) - 2 * map.value(1) + map.value(1 - h)) / h;
    };
    // By hand: the straight map's slope jumps from 1 to 2.
    expect(corner('straight')).toBeCloseTo(1, 6);
    expect(Math.abs(corner('monotone'))).toBeLessThan(1e-4);
  });

  it('goes on beyond its ends along its end slopes', () => {
    const map = compileMap(
      [
        [0, 0],
        [1, 1],
        [2, 3],
      ],
      'monotone',
      'extend',
    );
    // By hand: end secants 1 and 2.
    expect(map.value(-3)).toBeCloseTo(-3, 12);
    expect(map.value(4)).toBeCloseTo(7, 12);
    expect(map.inverse(7)).toBeCloseTo(4, 12);
    expect(map.inverse(-3)).toBeCloseTo(-3, 12);
  });

  it('with two points is a straight line', () => {
    const ends: [number, number][] = [
      [10, 300],
      [30, 100],
    ];
    const curved = compileMap(ends, 'monotone', 'clamp');
    for (const x of [10, 12.5, 20, 29, 30]) expect(curved.value(x)).toBeCloseTo(300 - (x - 10) * 10, 10);
  });
});
