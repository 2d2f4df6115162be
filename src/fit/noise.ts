/** What a converter adds by counting whole steps: LSB / sqrt(12) (W. R. Bennett, Bell Syst. Tech. J. 27 (1948) 446-472). */
export const QUANTISATION_COUNTS = 1 / Math.sqrt(12);

export interface Noise {
  /** Root mean square, in counts; never under the converter's own. */
  readonly counts: number;
  readonly readings: number;
}

/** Of a pot nobody has measured at rest: half a thousandth of the converter's range (common practice, no source). */
export const assumedNoise = (width: number): number => 0.0005 * width;

/** A joint at rest moves a little with the bench: its slow part is no noise of the pot, so it is taken out in windows. */
const WINDOW = 32;

/** @param counts readings of a joint that nobody touches, in order of time; two or more */
export function noiseOf(counts: ArrayLike<number>): Noise {
  let squares = 0;
  let dof = 0;
  for (let from = 0; from + 1 < counts.length; from += WINDOW) {
    const to = Math.min(from + WINDOW, counts.length);
    let mean = 0;
    for (let i = from; i < to; i++) mean += (counts[i] as number) / (to - from);
    for (let i = from; i < to; i++) squares += ((counts[i] as number) - mean) ** 2;
    dof += to - from - 1;
  }
  return { counts: Math.max(Math.sqrt(squares / Math.max(dof, 1)), QUANTISATION_COUNTS), readings: counts.length };
}

/**
 * Bits that a noiseless converter would need for the same resolution over a span: its step over sqrt(12) is its noise.
 * @param spanCounts what the joint uses of the converter
 */
export function effectiveBits(spanCounts: number, noiseCounts: number): number {
  return Math.log2(spanCounts / (noiseCounts * Math.sqrt(12)));
}
