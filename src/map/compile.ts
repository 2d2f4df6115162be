import { monotoneSlopes } from './monotone.ts';
import type { PointMap } from './points.ts';

export type Curve = 'straight' | 'monotone';

/** What a map does outside its outer points: go on along the end's slope, or stay at the outer value. */
export type Beyond = 'extend' | 'clamp';

/** Coefficients of a segment: y = c0 + d (c1 + d (c2 + d c3)), d = x - x_i. */
const ORDER = 4;

/** Halvings that bring a segment below one part in 2^52 of its width: no more can be told apart. */
const BISECTIONS = 52;

/**
 * Compiles measured points into a map.
 * @param points pairs (x, y), two or more, strictly rising in x; y strictly rising or strictly falling.
 *   The caller has checked that (rig files report it with a place), so a bad list is our bug and throws.
 */
export function compileMap(points: readonly (readonly [number, number])[], curve: Curve, beyond: Beyond): PointMap {
  const n = points.length;
  const x = Float64Array.from(points, (p) => p[0]);
  const y = Float64Array.from(points, (p) => p[1]);
  refuseBadPoints(x, y);
  const falling = at(y, n - 1) < at(y, 0);
  const slopes = curve === 'monotone' ? monotoneSlopes(x, y) : null;
  const segments = segmentTable(x, y, slopes);
  const firstSlope = beyond === 'clamp' ? 0 : slopes === null ? at(segments, 1) : at(slopes, 0);
  const lastSlope = beyond === 'clamp' ? 0 : slopes === null ? at(segments, (n - 2) * ORDER + 1) : at(slopes, n - 1);

  const within = (i: number, input: number): number => {
    const d = input - at(x, i);
    const c = i * ORDER;
    return at(segments, c) + d * (at(segments, c + 1) + d * (at(segments, c + 2) + d * at(segments, c + 3)));
  };
  const value = (input: number): number => {
    if (input <= at(x, 0)) return at(y, 0) + (input - at(x, 0)) * firstSlope;
    if (input >= at(x, n - 1)) return at(y, n - 1) + (input - at(x, n - 1)) * lastSlope;
    return within(bracket(x, input, false), input);
  };

  return {
    xMin: at(x, 0),
    xMax: at(x, n - 1),
    yMin: falling ? at(y, n - 1) : at(y, 0),
    yMax: falling ? at(y, 0) : at(y, n - 1),
    falling,
    value,
    apply(input, i, output, j) {
      output[j] = value(at(input, i));
    },
    inverse(output) {
      if (falling ? output >= at(y, 0) : output <= at(y, 0))
        return at(x, 0) + (firstSlope === 0 ? 0 : (output - at(y, 0)) / firstSlope);
      if (falling ? output <= at(y, n - 1) : output >= at(y, n - 1))
        return at(x, n - 1) + (lastSlope === 0 ? 0 : (output - at(y, n - 1)) / lastSlope);
      const i = bracket(y, output, falling);
      if (slopes === null) return at(x, i) + (output - at(y, i)) / at(segments, i * ORDER + 1);
      // Bisection: the cubic is monotone inside a segment, and near a flat end Newton would leave it.
      let low = at(x, i);
      let high = at(x, i + 1);
      for (let step = 0; step < BISECTIONS; step++) {
        const middle = 0.5 * (low + high);
        if (within(i, middle) < output !== falling) low = middle;
        else high = middle;
      }
      return 0.5 * (low + high);
    },
  };
}

function refuseBadPoints(x: Float64Array, y: Float64Array): void {
  if (x.length < 2) throw new RangeError('a map needs two points or more');
  const rises = at(y, 1) > at(y, 0);
  for (let i = 1; i < x.length; i++) {
    const turns = rises ? !(at(y, i) > at(y, i - 1)) : !(at(y, i) < at(y, i - 1));
    if (!(at(x, i) > at(x, i - 1)) || turns) throw new RangeError('points of a map turn back or repeat');
  }
}

/** One polynomial a segment; straight where `slopes` is null, the cubic Hermite through the slopes otherwise. */
function segmentTable(x: Float64Array, y: Float64Array, slopes: Float64Array | null): Float64Array {
  const table = new Float64Array((x.length - 1) * ORDER);
  for (let i = 0; i < x.length - 1; i++) {
    const h = at(x, i + 1) - at(x, i);
    const secant = (at(y, i + 1) - at(y, i)) / h;
    const from = slopes === null ? secant : at(slopes, i);
    const to = slopes === null ? secant : at(slopes, i + 1);
    table[i * ORDER] = at(y, i);
    table[i * ORDER + 1] = from;
    table[i * ORDER + 2] = (3 * secant - 2 * from - to) / h;
    table[i * ORDER + 3] = (from + to - 2 * secant) / (h * h);
    // A straight segment is exactly straight: no rounding crumbs in the upper coefficients.
    if (slopes === null) table.fill(0, i * ORDER + 2, i * ORDER + 4);
  }
  return table;
}

/** Index of the segment that holds `value`, in a list that rises (or falls). */
function bracket(list: Float64Array, value: number, falling: boolean): number {
  let low = 0;
  let high = list.length - 1;
  while (high - low > 1) {
    const middle = (low + high) >>> 1;
    if (falling ? at(list, middle) >= value : at(list, middle) <= value) low = middle;
    else high = middle;
  }
  return low;
}

function at(list: Float64Array, i: number): number {
  return list[i] as number;
}
