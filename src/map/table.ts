/** A row of a map's table: where it starts, then its coefficients: y = c0 + d (c1 + d (c2 + d c3)), d = x - start. */
export const ROW = 5;

/** What a map does outside its outer points: go on along the end's slope, or stay at the outer value. */
export type Beyond = 'extend' | 'clamp';

/**
 * A map as a table: a row before the first point, one for each segment, one from the last point on.
 * @param slopes null: straight between the points; else the cubic Hermite through them with these slopes
 */
export function tableOf(x: Float64Array, y: Float64Array, slopes: Float64Array | null, beyond: Beyond): Float64Array {
  const last = x.length - 1;
  const rows = new Float64Array((x.length + 1) * ROW);
  for (let i = 0; i < last; i++) {
    const h = at(x, i + 1) - at(x, i);
    const secant = (at(y, i + 1) - at(y, i)) / h;
    // A straight segment is exactly straight: no rounding crumbs in the upper coefficients.
    if (slopes === null) rows.set([at(x, i), at(y, i), secant], (i + 1) * ROW);
    else {
      const from = at(slopes, i);
      const to = at(slopes, i + 1);
      const square = (3 * secant - 2 * from - to) / h;
      rows.set([at(x, i), at(y, i), from, square, (from + to - 2 * secant) / (h * h)], (i + 1) * ROW);
    }
  }
  const slope = (i: number): number =>
    beyond === 'clamp' ? 0 : slopes === null ? at(rows, i * ROW + 2) : at(slopes, i);
  rows.set([at(x, 0), at(y, 0), slope(slopes === null ? 1 : 0)], 0);
  rows.set([at(x, last), at(y, last), slope(last)], (last + 1) * ROW);
  return rows;
}

/** output[j] = what the map in rows `first` to `last` (their offsets in `table`) makes of input[i]. */
export function readTable(
  table: Float64Array,
  first: number,
  last: number,
  input: Float64Array,
  i: number,
  output: Float64Array,
  j: number,
): void {
  const x = at(input, i);
  let row = first;
  // Maps have few points: the next one is nearer than the middle one.
  while (row < last && at(table, row + ROW) <= x) row += ROW;
  output[j] = valueIn(table, row, x);
}

export function valueIn(table: Float64Array, row: number, x: number): number {
  const d = x - at(table, row);
  return at(table, row + 1) + d * (at(table, row + 2) + d * (at(table, row + 3) + d * at(table, row + 4)));
}

function at(list: Float64Array, i: number): number {
  return list[i] as number;
}
