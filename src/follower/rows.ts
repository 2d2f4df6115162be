/**
 * Where one arm's joints (or servos) stand in a table that holds those of all arms: rows `from` to `to - 1`.
 *
 * The kernels that run at every command keep their numbers in a few long tables, arm after arm, made once for a drive:
 * the engine then compiles the tables into the loops, and 64 arms fit the processor's cache. With tables of their own
 * for each arm the same sums took three times as long (`npm run bench`).
 */
export interface Rows {
  readonly from: number;
  readonly to: number;
}

/** @param counts rows of each arm, in order */
export function rowsOf(counts: readonly number[]): readonly Rows[] {
  let to = 0;
  return counts.map((count) => {
    const from = to;
    to += count;
    return { from, to };
  });
}
