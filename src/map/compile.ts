import { monotoneSlopes } from './monotone.ts';
import type { PointMap } from './points.ts';

export type Curve = 'straight' | 'monotone';

/** What a map does outside its outer points: go on along the end's slope, or stay at the outer value. */
export type Beyond = 'extend' | 'clamp';

/**
 * Compiles measured points into a map.
 * @param points pairs (x, y), two or more, strictly rising in x; y strictly rising or strictly falling.
 *   The caller has checked that (rig files report it with a place), so a bad list is our bug and throws.
 */
export function compileMap(points: readonly (readonly [number, number])[], curve: Curve, beyond: Beyond): PointMap {
  const n = points.length;
  const x = Float64Array.from(points, (p) => p[0]);
  const y = Float64Array.from(points, (p) => p[1]);
  if (n < 2) throw new RangeError('a map needs two points or more');
  const falling = at(y, n - 1) < at(y, 0);
  for (let i = 1; i < n; i++) {
    if (!(at(x, i) > at(x, i - 1)) || !(falling ? at(y, i) < at(y, i - 1) : at(y, i) > at(y, i - 1)))
      throw new RangeError('points of a map turn back or repeat');
  }
  const slopes = curve === 'monotone' ? monotoneSlopes(x, y) : null;
  const segment = slopes === null ? straightSegment(x, y) : cubicSegment(x, y, slopes);
  const firstSlope = slopes === null ? secant(x, y, 0) : at(slopes, 0);
  const lastSlope = slopes === null ? secant(x, y, n - 2) : at(slopes, n - 1);

  return {
    xMin: at(x, 0),
    xMax: at(x, n - 1),
    yMin: falling ? at(y, n - 1) : at(y, 0),
    yMax: falling ? at(y, 0) : at(y, n - 1),
    falling,
    value(input) {
      if (input <= at(x, 0)) return at(y, 0) + (beyond === 'extend' ? (input - at(x, 0)) * firstSlope : 0);
      if (input >= at(x, n - 1)) return at(y, n - 1) + (beyond === 'extend' ? (input - at(x, n - 1)) * lastSlope : 0);
      return segment.value(bracket(x, input, false), input);
    },
    inverse(output) {
      const beforeFirst = falling ? output >= at(y, 0) : output <= at(y, 0);
      if (beforeFirst)
        return at(x, 0) + (beyond === 'extend' && firstSlope !== 0 ? (output - at(y, 0)) / firstSlope : 0);
      const pastLast = falling ? output <= at(y, n - 1) : output >= at(y, n - 1);
      if (pastLast)
        return at(x, n - 1) + (beyond === 'extend' && lastSlope !== 0 ? (output - at(y, n - 1)) / lastSlope : 0);
      return segment.inverse(bracket(y, output, falling), output);
    },
  };
}

interface Segments {
  value(i: number, x: number): number;
  inverse(i: number, y: number): number;
}

function straightSegment(x: Float64Array, y: Float64Array): Segments {
  return {
    value: (i, input) => at(y, i) + (input - at(x, i)) * secant(x, y, i),
    inverse: (i, output) => at(x, i) + (output - at(y, i)) / secant(x, y, i),
  };
}

/** Halvings that bring a segment below one part in 2^52 of its width: no more can be told apart. */
const BISECTIONS = 52;

function cubicSegment(x: Float64Array, y: Float64Array, slopes: Float64Array): Segments {
  const value = (i: number, input: number): number => {
    const h = at(x, i + 1) - at(x, i);
    const u = (input - at(x, i)) / h;
    const w = 1 - u;
    return (
      w * w * (1 + 2 * u) * at(y, i) +
      u * u * (3 - 2 * u) * at(y, i + 1) +
      h * u * w * (w * at(slopes, i) - u * at(slopes, i + 1))
    );
  };
  return {
    value,
    // Bisection: the cubic is monotone inside a segment, and near a flat end Newton would leave it.
    inverse(i, output) {
      const rising = at(y, i + 1) > at(y, i);
      let low = at(x, i);
      let high = at(x, i + 1);
      for (let step = 0; step < BISECTIONS; step++) {
        const middle = 0.5 * (low + high);
        if (value(i, middle) < output === rising) low = middle;
        else high = middle;
      }
      return 0.5 * (low + high);
    },
  };
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

function secant(x: Float64Array, y: Float64Array, i: number): number {
  return (at(y, i + 1) - at(y, i)) / (at(x, i + 1) - at(x, i));
}

function at(list: Float64Array, i: number): number {
  return list[i] as number;
}
