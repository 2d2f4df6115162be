/** A strictly rising or falling map through measured points, invertible over the points' span. */
export interface PointMap {
  /** Value at `x`. Beyond the outer points: as `beyond` of the map says. */
  value(x: number): number;
  /** The `x` whose value is `y`, under the same rule. */
  inverse(y: number): number;
  /** Outer points in x, rising. */
  readonly xMin: number;
  readonly xMax: number;
  /** Outer points in y, rising, whichever way the map runs. */
  readonly yMin: number;
  readonly yMax: number;
  readonly falling: boolean;
}
