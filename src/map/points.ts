/** A strictly rising or falling map through measured points, invertible over the points' span. */
export interface PointMap {
  /** Value at `x`. Beyond the outer points it goes on along the end's slope or stays, as the map was compiled. */
  value(x: number): number;
  /** output[j] = value(input[i]): the same without a number crossing a call, which would allocate. */
  apply(input: Float64Array, i: number, output: Float64Array, j: number): void;
  /** The `x` whose value is `y`, under the same rule. */
  inverse(y: number): number;
  /** Outer points in x, rising. */
  readonly xMin: number;
  readonly xMax: number;
  /** Outer points in y, rising, whichever way the map runs. */
  readonly yMin: number;
  readonly yMax: number;
  readonly falling: boolean;
  /** The map as rows of polynomials (`table.ts`), for whoever packs many of them together. */
  readonly table: Float64Array;
}
