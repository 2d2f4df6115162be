/** One way from a leader's bytes to its followers' bytes; the bench compares four. */
export interface Way {
  /** Takes what has arrived at nowUs[0] (integer microseconds) and leaves each follower's command in `sent`. */
  push(chunk: Uint8Array, nowUs: Float64Array): void;
  /** Bytes of follower `f`'s last command. For tests and for the sum that keeps the work from being optimised away. */
  sent(f: number): Uint8Array;
  /** Commands sent so far, by all followers together. */
  commands(): number;
}
