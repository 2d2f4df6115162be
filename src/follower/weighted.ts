import type { WeightedSource } from './spec.ts';

/** Weighted sums of angles or speeds, one a row. */
export interface WeightedSums {
  readonly rows: number;
  /** base + sum of weight x[joint] over the sources of row `r`. */
  sum(r: number, base: number, x: Float64Array): number;
}

/** @param rows the sources of each */
export function weightedSums(rows: readonly (readonly WeightedSource[])[]): WeightedSums {
  const first = new Uint16Array(rows.length + 1);
  rows.forEach((sources, r) => (first[r + 1] = (first[r] as number) + sources.length));
  const all = rows.flat();
  const from = Uint16Array.from(all, (source) => source.joint);
  const weight = Float64Array.from(all, (source) => source.weight);
  return {
    rows: rows.length,
    sum(r, base, x) {
      let sum = base;
      for (let t = first[r] as number; t < (first[r + 1] as number); t++)
        sum += (weight[t] as number) * (x[from[t] as number] as number);
      return sum;
    },
  };
}
