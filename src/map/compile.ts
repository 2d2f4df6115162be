import { monotoneSlopes } from './monotone.ts';
import type { PointMap } from './points.ts';
import { type Beyond, readTable, ROW, tableOf, valueIn } from './table.ts';

export type Curve = 'straight' | 'monotone';

/** Halvings that bring a segment below one part in 2^52 of its width: no more can be told apart. */
const BISECTIONS = 52;

/**
 * Compiles measured points into a map.
 * @param points pairs (x, y), two or more, strictly rising in x; y strictly rising or strictly falling.
 *   The caller has checked that (rig files report it with a place), so a bad list is our bug and throws.
 */
export function compileMap(points: readonly (readonly [number, number])[], curve: Curve, beyond: Beyond): PointMap {
  const x = Float64Array.from(points, (p) => p[0]);
  const y = Float64Array.from(points, (p) => p[1]);
  refuseBadPoints(x, y);
  return new CompiledMap(x, y, curve, beyond);
}

/**
 * A class, because a rig has hundreds of maps that are read at every command: methods are compiled once for all of
 * them, while the variables of so many closures would be looked up and checked anew at every use.
 */
class CompiledMap implements PointMap {
  readonly xMin: number;
  readonly xMax: number;
  readonly yMin: number;
  readonly yMax: number;
  readonly falling: boolean;
  readonly table: Float64Array;
  private readonly straight: boolean;

  constructor(x: Float64Array, y: Float64Array, curve: Curve, beyond: Beyond) {
    const last = x.length - 1;
    this.falling = at(y, last) < at(y, 0);
    this.xMin = at(x, 0);
    this.xMax = at(x, last);
    this.yMin = at(y, this.falling ? last : 0);
    this.yMax = at(y, this.falling ? 0 : last);
    this.straight = curve === 'straight';
    this.table = tableOf(x, y, this.straight ? null : monotoneSlopes(x, y), beyond);
  }

  value(input: number): number {
    const cell = Float64Array.of(input);
    this.apply(cell, 0, cell, 0);
    return at(cell, 0);
  }

  apply(input: Float64Array, i: number, output: Float64Array, j: number): void {
    const { table } = this;
    readTable(table, 0, table.length - ROW, input, i, output, j);
  }

  inverse(output: number): number {
    const { table: rows, falling } = this;
    let row = 0;
    const reached = (start: number): boolean => (falling ? start >= output : start <= output);
    while (row + ROW < rows.length && reached(at(rows, row + ROW + 1))) row += ROW;
    const start = at(rows, row);
    const beyond = row === 0 || row + ROW === rows.length;
    if (!this.straight && !beyond) return this.bisect(row, output);
    const slope = at(rows, row + 2);
    return slope === 0 ? start : start + (output - at(rows, row + 1)) / slope;
  }

  /** The cubic is monotone inside a segment, and near a flat end Newton would leave it. */
  private bisect(row: number, output: number): number {
    let low = at(this.table, row);
    let high = at(this.table, row + ROW);
    for (let step = 0; step < BISECTIONS; step++) {
      const middle = 0.5 * (low + high);
      if (valueIn(this.table, row, middle) < output !== this.falling) low = middle;
      else high = middle;
    }
    return 0.5 * (low + high);
  }
}

function refuseBadPoints(x: Float64Array, y: Float64Array): void {
  if (x.length < 2) throw new RangeError('a map needs two points or more');
  const rises = at(y, 1) > at(y, 0);
  for (let i = 1; i < x.length; i++) {
    const turns = rises ? !(at(y, i) > at(y, i - 1)) : !(at(y, i) < at(y, i - 1));
    if (!(at(x, i) > at(x, i - 1)) || turns) throw new RangeError('points of a map turn back or repeat');
  }
}

function at(list: Float64Array, i: number): number {
  return list[i] as number;
}
