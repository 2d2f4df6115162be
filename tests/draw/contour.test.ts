import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { contours, simplified } from '../../src/draw/contour.ts';
import type { Point } from '../../src/draw/contour.ts';

const COLUMNS = 12;
const ROWS = 9;

/** A grid with these cells set. */
function marked(cells: readonly (readonly [number, number])[]): Float64Array {
  const grid = new Float64Array(COLUMNS * ROWS);
  for (const [x, y] of cells) grid[y * COLUMNS + x] = 1;
  return grid;
}

/** Area by the shoelace formula, positive for one way round and negative for the other. */
function area(ring: readonly Point[]): number {
  return ring.reduce((sum, [x, y], i) => {
    const [nx, ny] = ring[(i + 1) % ring.length] as Point;
    return sum + (x * ny - nx * y) / 2;
  }, 0);
}

const outline = (cells: readonly (readonly [number, number])[]) => contours(marked(cells), COLUMNS, ROWS, 0.5);

describe('the outline of marked cells', () => {
  it('goes halfway to the unmarked neighbours', () => {
    const [ring, ...others] = outline([[4, 4]]);
    expect(others).toEqual([]);
    // Crossings lie at half a cell to the left, right, above and below: a square standing on its corner.
    expect(new Set(ring?.map(String))).toEqual(new Set(['3.5,4', '4.5,4', '4,3.5', '4,4.5']));
  });

  it('goes round a hole the other way', () => {
    const frame = [3, 4, 5]
      .flatMap((x) => [3, 4, 5].map((y) => [x, y] as const))
      .filter(([x, y]) => x !== 4 || y !== 4);
    const rings = outline(frame);
    expect(rings).toHaveLength(2);
    const [one = 0, other = 0] = rings.map(area);
    expect(one * other).toBeLessThan(0);
  });

  it('keeps cells apart that touch at a corner only, however they touch', () => {
    expect(
      outline([
        [3, 3],
        [4, 4],
      ]),
    ).toHaveLength(2);
    expect(
      outline([
        [4, 3],
        [3, 4],
      ]),
    ).toHaveLength(2);
  });

  it('encloses every marked cell and no other', () => {
    const cell = fc.tuple(fc.integer({ min: 1, max: COLUMNS - 2 }), fc.integer({ min: 1, max: ROWS - 2 }));
    fc.assert(
      fc.property(fc.uniqueArray(cell, { selector: String, maxLength: 60 }), (cells) => {
        const rings = outline(cells);
        for (let x = 0; x < COLUMNS; x++) {
          for (let y = 0; y < ROWS; y++) {
            const inside = rings.filter((ring) => encloses(ring, [x, y])).length % 2 === 1;
            expect(inside, `${x},${y}`).toBe(cells.some(([cx, cy]) => cx === x && cy === y));
          }
        }
      }),
    );
  });
});

/** By the number of sides that a ray to the right crosses. */
function encloses(ring: readonly Point[], [x, y]: Point): boolean {
  return (
    ring.filter(([ax, ay], i) => {
      const [bx, by] = ring[(i + 1) % ring.length] as Point;
      return ay > y !== by > y && x < ax + ((y - ay) / (by - ay)) * (bx - ax);
    }).length %
      2 ===
    1
  );
}

describe('a simplified ring', () => {
  it('keeps corners and drops what lies between them', () => {
    const square: Point[] = [];
    for (let i = 0; i < 10; i++) square.push([i, 0]);
    for (let i = 0; i < 10; i++) square.push([10, i]);
    for (let i = 10; i > 0; i--) square.push([i, 10]);
    for (let i = 10; i > 0; i--) square.push([0, i]);
    expect(simplified(square, 0.01)).toEqual([
      [0, 0],
      [10, 0],
      [10, 10],
      [0, 10],
    ]);
  });

  it('strays no farther than its tolerance', () => {
    fc.assert(
      fc.property(
        fc.double({ min: 0.02, max: 2, noNaN: true }),
        fc.integer({ min: 3, max: 200 }),
        (tolerance, count) => {
          const circle = Array.from({ length: count }, (_, i): Point => {
            const angle = (2 * Math.PI * i) / count;
            return [10 * Math.cos(angle), 10 * Math.sin(angle)];
          });
          const ring = simplified(circle, tolerance);
          for (const point of circle) {
            const nearest = Math.min(...ring.map((a, i) => toStretch(point, a, ring[(i + 1) % ring.length] as Point)));
            expect(nearest).toBeLessThanOrEqual(tolerance + 1e-9);
          }
        },
      ),
    );
  });
});

function toStretch([x, y]: Point, [ax, ay]: Point, [bx, by]: Point): number {
  const length = (bx - ax) ** 2 + (by - ay) ** 2;
  const share = length === 0 ? 0 : Math.max(0, Math.min(1, ((x - ax) * (bx - ax) + (y - ay) * (by - ay)) / length));
  return Math.hypot(x - ax - share * (bx - ax), y - ay - share * (by - ay));
}
