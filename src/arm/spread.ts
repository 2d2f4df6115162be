/** Places spread evenly over a box of any dimension, the same ones every time: for looking over an arm's poses. */
export interface Spread {
  /** Coordinate `k` of place `n` (1, 2, ...), from 0 to below 1. */
  at(n: number, k: number): number;
}

/**
 * The additive recurrence of the generalised golden ratio, the positive root of x^(d+1) = x + 1 (M. Roberts, "The
 * unreasonable effectiveness of quasirandom sequences", 2018; from memory): any first n places leave no large gap.
 */
export function spread(dimensions: number): Spread {
  let ratio = 2;
  // Each pass shrinks the error at least threefold.
  for (let pass = 0; pass < 40; pass++) ratio = (1 + ratio) ** (1 / (dimensions + 1));
  const steps = Float64Array.from({ length: dimensions }, (_, k) => ratio ** -(k + 1));
  return { at: (n, k) => (n * (steps[k] as number)) % 1 };
}
