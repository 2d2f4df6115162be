import { BY_EYE_DEG } from './map-error.ts';
import { type Estimate, fitMap, type MapFit, type NoMap } from './map-fit.ts';

/** A follower's joint parked at a known angle, and the leader set alike by eye; degrees. */
export interface PosePair {
  readonly leaderDeg: number;
  readonly followerDeg: number;
}

export interface Match {
  readonly gain: Estimate;
  readonly direction: 'same' | 'reversed';
  readonly offsetDeg: Estimate;
  /** What the leader was set by, over the follower; its residuals are the hand's. */
  readonly fit: MapFit;
}

/** An eye sets a joint no better than this, degrees (common practice, no source). */
const EYE_DEG = 0.3;

/**
 * Gain, direction and offset of follower = direction x gain x leader + offset. The follower stands where it was told and
 * the hand is what errs, so the leader is fitted over the follower and the line then turned round: the other way would
 * shrink the gain.
 */
export function matchPoses(pairs: readonly PosePair[]): Match | NoMap {
  const fit = fitMap(
    pairs.map(({ followerDeg }) => followerDeg),
    pairs.map(({ leaderDeg }) => leaderDeg),
    { noise: EYE_DEG, usualScatter: BY_EYE_DEG, curves: false },
  );
  if ('why' in fit) return fit;
  const { slope, middle } = fit;
  const gain = 1 / slope.is;
  // leader = m + s (follower - x): where the leader is zero, the follower is x - m / s.
  const offset = middle.x - middle.is * gain;
  const scaled = (error: number | null, by: number): number | null => (error === null ? null : error * by);
  const gainError = scaled(slope.error95, gain * gain);
  const middleError = scaled(middle.error95, Math.abs(gain));
  return {
    gain: { is: Math.abs(gain), error95: gainError },
    direction: gain < 0 ? 'reversed' : 'same',
    offsetDeg: {
      is: offset,
      error95: gainError === null || middleError === null ? null : Math.hypot(middleError, middle.is * gainError),
    },
    fit,
  };
}
