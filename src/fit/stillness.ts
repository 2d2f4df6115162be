/** Readings of one joint that is held still, or why they are not that. */
export type Hold =
  | { readonly still: true; readonly mean: number; readonly noise: number; readonly n: number }
  | { readonly still: false; readonly why: 'few' | 'moving' | 'noisy' | 'rail'; readonly n: number };

/** A hold needs this many readings: a quarter of a second at the usual hundred a second. */
const READINGS_MIN = 12;
/** Standard deviations of a joint at rest that a hand may add before the hold is called noisy. */
const NOISE_SHARE_MAX = 4;
/** Counts that a hold may wander whatever the noise: a converter's own last digits. */
const COUNTS_FREE = 1.5;
/** Standard errors that the two halves of a hold may be apart before it is called moving. */
const DRIFT_SIGMAS = 4;

/**
 * Judges readings of one hold.
 * @param counts in order of time
 * @param noise standard deviation of the joint at rest, in counts
 */
export function judgeHold(counts: ArrayLike<number>, noise: number): Hold {
  const n = counts.length;
  if (n < READINGS_MIN) return { still: false, why: 'few', n };
  const half = n >> 1;
  const [before, after, mean] = [meanOf(counts, 0, half), meanOf(counts, half, n), meanOf(counts, 0, n)];
  // The spread about each half's own mean: a slow drift must not pass for noise.
  const spread = Math.sqrt((squaresOf(counts, 0, half, before) + squaresOf(counts, half, n, after)) / (n - 2));
  const drift = Math.abs(after - before);
  const allowed = DRIFT_SIGMAS * Math.max(spread, noise) * Math.sqrt(1 / half + 1 / (n - half)) + COUNTS_FREE / 2;
  if (drift > allowed) return { still: false, why: 'moving', n };
  if (spread > NOISE_SHARE_MAX * noise + COUNTS_FREE) return { still: false, why: 'noisy', n };
  return { still: true, mean, noise: spread, n };
}

function meanOf(counts: ArrayLike<number>, from: number, to: number): number {
  let sum = 0;
  for (let i = from; i < to; i++) sum += counts[i] as number;
  return sum / (to - from);
}

function squaresOf(counts: ArrayLike<number>, from: number, to: number, mean: number): number {
  let sum = 0;
  for (let i = from; i < to; i++) sum += ((counts[i] as number) - mean) ** 2;
  return sum;
}
