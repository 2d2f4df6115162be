/** The straight line from which a set of points deviates least at most. */
export interface LeastDeviation {
  readonly slope: number;
  readonly offset: number;
  /** Largest distance of a point from it, in y. */
  readonly deviation: number;
}

/**
 * Independent linearity, as the potentiometer industry defines it: the largest deviation from the straight line whose slope
 * and position are both chosen to make that deviation least (VRCI terms: "independent linearity"; in percent of the total
 * applied voltage). Exact: such a line runs parallel to an edge of the points' convex hull, midway to the point farthest from it.
 * @param x n values (travel), at least two different
 * @param y n values (output)
 */
export function leastDeviation(x: ArrayLike<number>, y: ArrayLike<number>): LeastDeviation {
  const order = Array.from({ length: x.length }, (_, i) => i).sort(
    (a, b) => (x[a] as number) - (x[b] as number) || (y[a] as number) - (y[b] as number),
  );
  const upper = hull(order, x, y, 1);
  const lower = hull(order, x, y, -1);
  let best: LeastDeviation = { slope: Number.NaN, offset: Number.NaN, deviation: Number.POSITIVE_INFINITY };
  for (const edgeOf of [upper, lower]) {
    for (let e = 0; e + 1 < edgeOf.length; e++) {
      const [a, b] = [edgeOf[e] as number, edgeOf[e + 1] as number];
      const slope = ((y[b] as number) - (y[a] as number)) / ((x[b] as number) - (x[a] as number));
      if (!Number.isFinite(slope)) continue;
      let low = Number.POSITIVE_INFINITY;
      let high = Number.NEGATIVE_INFINITY;
      for (let i = 0; i < x.length; i++) {
        const offset = (y[i] as number) - slope * (x[i] as number);
        low = Math.min(low, offset);
        high = Math.max(high, offset);
      }
      const deviation = (high - low) / 2;
      if (deviation < best.deviation) best = { slope, offset: (high + low) / 2, deviation };
    }
  }
  return best;
}

/** One side of the convex hull, from left to right (A. M. Andrew, Inf. Process. Lett. 9 (1979) 216-219). */
function hull(order: readonly number[], x: ArrayLike<number>, y: ArrayLike<number>, side: 1 | -1): readonly number[] {
  const chain: number[] = [];
  for (const c of order) {
    while (chain.length >= 2 && turn(chain.at(-2) as number, chain.at(-1) as number, c, x, y) * side >= 0) chain.pop();
    chain.push(c);
  }
  return chain;
}

function turn(a: number, b: number, c: number, x: ArrayLike<number>, y: ArrayLike<number>): number {
  const [ax, ay] = [x[a] as number, y[a] as number];
  return ((x[b] as number) - ax) * ((y[c] as number) - ay) - ((y[b] as number) - ay) * ((x[c] as number) - ax);
}
