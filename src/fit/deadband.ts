import { studentT } from './distributions.ts';
import type { Estimate } from './map-fit.ts';

/** One small change of a servo's pulse, in the order in which they were sent. */
export interface PulseStep {
  readonly pulseUs: number;
  /** The horn was seen to move at it. */
  readonly moved: boolean;
}

const TAILS = 0.05;

/**
 * The smallest change of pulse that a servo answers as it goes on the way it was going: play has nothing to do with it
 * there. Counted from pulses at which it was seen to move, because only there it stands where its pulse says: a slow
 * approach leaves it short by as much as its deadband.
 * @returns microseconds of pulse; half of the step it was found with is error too. null: no such pair of moves
 */
export function deadbandOf(steps: readonly PulseStep[]): Estimate | null {
  const between: (readonly [number, number])[] = [];
  /** Where it stands, and which way it came; 0: nobody knows. */
  let rest = steps[0]?.pulseUs ?? Number.NaN;
  let came = 0;
  let still = 0;
  for (const { pulseUs, moved } of steps.slice(1)) {
    const change = pulseUs - rest;
    const onward = came !== 0 && Math.sign(change) === came && Math.abs(change) > still;
    if (moved) {
      if (onward) between.push([still, Math.abs(change)]);
      came = Math.sign(change);
      rest = pulseUs;
      still = 0;
    } else if (onward) still = Math.abs(change);
    // A step back inside the deadband: from here on nobody knows on which side of the play it stands.
    else came = 0;
  }
  const n = between.length;
  if (n === 0) return null;
  const middles = between.map(([low, high]) => (low + high) / 2);
  const is = middles.reduce((sum, us) => sum + us, 0) / n;
  const half = between.reduce((sum, [low, high]) => sum + (high - low) / 2, 0) / n;
  if (n === 1) return { is, error95: half };
  const spread = Math.sqrt(middles.reduce((sum, us) => sum + (us - is) ** 2, 0) / (n - 1));
  return { is, error95: Math.hypot(half, (studentT(TAILS, n - 1) * spread) / Math.sqrt(n)) };
}

/**
 * What of the motion that is lost as a servo turns back is play of its gears and horn. At one pulse it stands up to its
 * deadband short of it on either side, so between none and twice the deadband is no play: the middle is given, and the rest
 * counted as error.
 * @param lostDeg angle at one pulse come to from either side, the difference
 */
export function backlashOf(lostDeg: Estimate, deadbandDeg: number): Estimate {
  return {
    is: Math.max(0, lostDeg.is - deadbandDeg),
    error95: lostDeg.error95 === null ? null : Math.hypot(lostDeg.error95, deadbandDeg),
  };
}
