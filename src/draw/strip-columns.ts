import { pathData } from './svg.ts';

/** The least and the greatest value that fell into each column; NaN where none did. */
export interface Trace {
  readonly least: Float64Array;
  readonly most: Float64Array;
  /** Between columns with values this far apart, or farther, the line is broken. */
  readonly apart: number;
}

export function trace(columns: number, apart: number): Trace {
  return { least: new Float64Array(columns).fill(Number.NaN), most: new Float64Array(columns).fill(Number.NaN), apart };
}

/** Adds a value to a column. */
export function widen({ least, most }: Trace, column: number, value: number): void {
  if (!(value >= (least[column] as number))) least[column] = value;
  if (!(value <= (most[column] as number))) most[column] = value;
}

/** Columns from `from` up to, without, `to`. */
export interface ColumnRun {
  readonly from: number;
  readonly to: number;
}

/** What flickers by less than this looks like one stretch on paper. */
const MERGED_COLUMNS = 3;

/** The stretches of columns that have any of `bits`. */
export function runsOf(columns: Uint8Array, bits: number): readonly ColumnRun[] {
  const runs: { from: number; to: number }[] = [];
  for (let column = 0; column < columns.length; column++) {
    if (((columns[column] as number) & bits) === 0) continue;
    const last = runs.at(-1);
    if (last !== undefined && column - last.to < MERGED_COLUMNS) last.to = column + 1;
    else runs.push({ from: column, to: column + 1 });
  }
  return runs;
}

/** On paper, a line that is off by this many millimetres is where it should be. */
const FLAT_MM = 0.03;

type Place = readonly [number, number];

/** The line of a trace, up and down inside each column, as path data; points that only lie on the way are left out. */
export function tracePath(
  { least, most, apart }: Trace,
  toX: (column: number) => number,
  toY: (value: number) => number,
): string {
  const lines: Place[][] = [];
  let last = Number.NEGATIVE_INFINITY;
  for (let column = 0; column < least.length; column++) {
    const [low, high] = [least[column] as number, most[column] as number];
    if (Number.isNaN(low)) continue;
    if (column - last >= apart) lines.push([]);
    last = column;
    const points = lines.at(-1) as Place[];
    const before = points.at(-1)?.[1] ?? toY(low);
    const ends = [toY(low), toY(high)];
    // It enters at the end that is nearer to where it comes from.
    if (Math.abs((ends[1] as number) - before) < Math.abs((ends[0] as number) - before)) ends.reverse();
    points.push([toX(column), ends[0] as number]);
    if (Math.abs((ends[1] as number) - (ends[0] as number)) > FLAT_MM) points.push([toX(column), ends[1] as number]);
  }
  return lines.map((points) => pathData(bends(points), false)).join('');
}

/**
 * The points that a line has to go through so that it passes none of the others by more than `FLAT_MM`: each is the last one
 * that a straight line from the one before can reach through the gates that all those between leave open.
 */
function bends(points: readonly Place[]): readonly Place[] {
  const [first] = points;
  if (first === undefined) return [];
  const kept = [first];
  let anchor = first;
  let candidate = first;
  let [lowest, highest] = [Number.NEGATIVE_INFINITY, Number.POSITIVE_INFINITY];
  for (const point of points.slice(1)) {
    const slope = (point[1] - anchor[1]) / (point[0] - anchor[0]);
    if (!(slope >= lowest && slope <= highest && point[0] > anchor[0])) {
      if (candidate !== anchor) kept.push(candidate);
      anchor = candidate;
      [lowest, highest] = [Number.NEGATIVE_INFINITY, Number.POSITIVE_INFINITY];
    }
    const run = point[0] - anchor[0];
    if (run > 0) {
      lowest = Math.max(lowest, (point[1] - FLAT_MM - anchor[1]) / run);
      highest = Math.min(highest, (point[1] + FLAT_MM - anchor[1]) / run);
    } else {
      kept.push(point);
      anchor = point;
    }
    candidate = point;
  }
  // A line of one point is a dot where its caps are round.
  if (candidate !== anchor || kept.length === 1) kept.push(candidate);
  return kept;
}
