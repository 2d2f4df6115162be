import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { compileMap, type Curve } from '../../src/map/compile.ts';
import { mapPoints } from './points.ts';

const CURVES: Curve[] = ['straight', 'monotone'];
const share = fc.double({ min: 0, max: 1, noNaN: true });

describe.each(CURVES)('any %s map', (curve) => {
  it('goes through each of its points', () => {
    fc.assert(
      fc.property(mapPoints, (points) => {
        const map = compileMap(points, curve, 'extend');
        for (const [x, y] of points) expect(Math.abs(map.value(x) - y)).toBeLessThanOrEqual(1e-9 * (1 + Math.abs(y)));
      }),
    );
  });

  it('never turns, inside its points or beyond them', () => {
    fc.assert(
      fc.property(mapPoints, fc.array(share, { minLength: 2, maxLength: 50 }), (points, shares) => {
        const map = compileMap(points, curve, 'extend');
        const width = map.xMax - map.xMin;
        const xs = shares.map((s) => map.xMin - width / 2 + 2 * width * s).toSorted((a, b) => a - b);
        const crumb = 1e-9 * (map.yMax - map.yMin);
        for (let i = 1; i < xs.length; i++) {
          const step = map.value(xs[i] as number) - map.value(xs[i - 1] as number);
          expect(map.falling ? -step : step).toBeGreaterThanOrEqual(-crumb);
        }
      }),
    );
  });

  it('is undone by its inverse inside its points', () => {
    fc.assert(
      fc.property(mapPoints, share, (points, s) => {
        const map = compileMap(points, curve, 'clamp');
        const y = map.yMin + (map.yMax - map.yMin) * s;
        const x = map.inverse(y);
        expect(x).toBeGreaterThanOrEqual(map.xMin);
        expect(x).toBeLessThanOrEqual(map.xMax);
        // The value of the inverse, not the inverse of the value: on a flat stretch many inputs have one value.
        expect(Math.abs(map.value(x) - y)).toBeLessThanOrEqual(1e-9 * (map.yMax - map.yMin) + 1e-9 * Math.abs(y));
      }),
    );
  });

  it('clamps every value into its points, and extends without a step', () => {
    fc.assert(
      fc.property(mapPoints, fc.double({ min: -3, max: 4, noNaN: true }), (points, s) => {
        const clamped = compileMap(points, curve, 'clamp');
        const extended = compileMap(points, curve, 'extend');
        const x = clamped.xMin + (clamped.xMax - clamped.xMin) * s;
        const crumb = 1e-9 * (clamped.yMax - clamped.yMin);
        expect(clamped.value(x)).toBeGreaterThanOrEqual(clamped.yMin - crumb);
        expect(clamped.value(x)).toBeLessThanOrEqual(clamped.yMax + crumb);
        const held = Math.min(Math.max(x, clamped.xMin), clamped.xMax);
        expect(extended.value(held)).toBe(clamped.value(held));
        for (const end of [extended.xMin, extended.xMax]) {
          const near = 1e-9 * (extended.xMax - extended.xMin);
          const step = Math.abs(extended.value(end + near) - extended.value(end - near));
          expect(step).toBeLessThanOrEqual(1e-6 * (extended.yMax - extended.yMin));
        }
      }),
    );
  });
});

describe('a straight map, rising or falling,', () => {
  it('gives its input back through value and inverse, inside and beyond its points', () => {
    fc.assert(
      fc.property(mapPoints, fc.double({ min: -1, max: 2, noNaN: true }), (points, s) => {
        const map = compileMap(points, 'straight', 'extend');
        const width = map.xMax - map.xMin;
        const x = map.xMin + width * s;
        // Every generated segment is at least a thousandth as steep as the whole, so rounding stays small.
        expect(Math.abs(map.inverse(map.value(x)) - x)).toBeLessThanOrEqual(1e-8 * width);
      }),
    );
  });
});
