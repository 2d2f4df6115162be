/** A place where a joint stood still in the midst of a sweep. */
export interface Dwell {
  /** First reading and the one after the last. */
  readonly from: number;
  readonly to: number;
  readonly counts: number;
  /** Which way the joint came: 1 with counts rising, -1 falling, 0 unknown (the sweep begins with it). */
  readonly came: -1 | 0 | 1;
}

/** Shorter stops are hesitations: 0.4 s at the usual hundred readings a second. */
const READINGS_MIN = 40;
/** Counts either side of its middle that a standing joint may show whatever its noise. */
const COUNTS_FREE = 2;
const NOISE_SHARE = 5;

/**
 * Every dwell of a sweep, in order.
 * @param path counts in order of time, spikes taken out
 * @param noise standard deviation at rest, in counts
 */
export function dwellsOf(path: ArrayLike<number>, noise: number): readonly Dwell[] {
  const within = 2 * Math.max(NOISE_SHARE * noise, COUNTS_FREE);
  const dwells: Dwell[] = [];
  let from = 0;
  let low = Number.POSITIVE_INFINITY;
  let high = Number.NEGATIVE_INFINITY;
  const close = (to: number): void => {
    if (to - from < READINGS_MIN) return;
    // Its ends may belong to the motion before and after.
    const trim = Math.floor((to - from) / 5);
    const counts = medianOf(Array.prototype.slice.call(path, from + trim, to - trim) as number[]);
    const before = dwells.at(-1);
    const came = Math.sign(counts - (before?.counts ?? (path[0] as number))) as Dwell['came'];
    // A joint that creeps on within its noise is one dwell, told twice.
    if (before !== undefined && Math.abs(counts - before.counts) <= within) {
      const joined = { ...before, to };
      if (from - before.to < READINGS_MIN) {
        dwells[dwells.length - 1] = joined;
        return;
      }
    }
    dwells.push({ from, to, counts, came: from === 0 ? 0 : came });
  };
  for (let i = 0; i < path.length; i++) {
    const at = path[i] as number;
    low = Math.min(low, at);
    high = Math.max(high, at);
    if (high - low <= within) continue;
    close(i);
    // The next stretch begins with the last readings that still fit together.
    from = i;
    low = at;
    high = at;
    while (
      from > 0 &&
      Math.max(high, path[from - 1] as number) - Math.min(low, path[from - 1] as number) <= within / 2
    ) {
      from--;
      low = Math.min(low, path[from] as number);
      high = Math.max(high, path[from] as number);
    }
  }
  close(path.length);
  return dwells;
}

export function medianOf(values: readonly number[]): number {
  const sorted = values.toSorted((a, b) => a - b);
  const middle = sorted.length >> 1;
  const upper = sorted[middle] ?? Number.NaN;
  return sorted.length % 2 === 1 ? upper : ((sorted[middle - 1] ?? Number.NaN) + upper) / 2;
}
