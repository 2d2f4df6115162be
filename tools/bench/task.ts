/** What a child process of the bench is asked, and what it answers. */

export const WAYS = ['whole', 'tight', 'stock', 'hobby', 'lines'] as const;
/** `lines` is the program again, over the text wire. */
export type WayName = (typeof WAYS)[number];

export interface Task {
  readonly way: WayName;
  readonly followers: number;
  /** Readings pushed before anything is measured: the arms have met the hand and the code is compiled. */
  readonly warmUp: number;
  readonly measure: 'time' | 'paced' | 'bytes';
  /** Readings measured. */
  readonly readings: number;
  /** Load RxJS's ES2015 build instead of the one Node finds. */
  readonly es2015: boolean;
}

/** Microseconds per reading. */
export interface TimeOutcome {
  /** Of batches, so that the meter costs nothing; for `paced`, of single readings. */
  readonly medianUs: number;
  /** Of single readings. */
  readonly p99Us: number;
  readonly worstUs: number;
  readonly gc: { readonly pauses: number; readonly longestUs: number; readonly shareOfTime: number };
  /** Commands that each reading made. */
  readonly commands: number;
}

export interface BytesOutcome {
  /** Allocated per reading. */
  readonly bytes: number;
  readonly commands: number;
}

export function quantile(sorted: ArrayLike<number>, q: number): number {
  return sorted[Math.min(sorted.length - 1, Math.floor(q * sorted.length))] ?? Number.NaN;
}

export function median(values: readonly number[]): number {
  return quantile(
    [...values].sort((a, b) => a - b),
    0.5,
  );
}
