import type { WeightedSource } from './spec.ts';

/** Weighted sums, laid out flat: row r is the sum of weight[t] x[from[t]] over the terms t = first[r] to first[r + 1] - 1. */
export interface WeightedSums {
  readonly first: Uint16Array;
  readonly from: Uint16Array;
  readonly weight: Float64Array;
}

export function weightedSums(rows: readonly (readonly WeightedSource[])[]): WeightedSums {
  const first = new Uint16Array(rows.length + 1);
  rows.forEach((terms, r) => (first[r + 1] = (first[r] as number) + terms.length));
  const all = rows.flat();
  return {
    first,
    from: Uint16Array.from(all, (term) => term.joint),
    weight: Float64Array.from(all, (term) => term.weight),
  };
}
