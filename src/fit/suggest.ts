/** What may be asked of a follower at rest, and of its lag. */
export interface SuggestWish {
  /** Largest root-mean-square jitter of the tip while the leader is still, metres. */
  readonly jitterM: number;
  /** Longest delay that smoothing may add to a slow motion, seconds. */
  readonly lagS: number;
}

/** One joint of the leader with what hangs on it. */
export interface SuggestJoint {
  /** Root mean square of its angle at rest, radians, before smoothing. */
  readonly noiseRad: number;
  /** One a follower joint that it feeds. */
  readonly feeds: readonly Feed[];
}

export interface Feed {
  /** Radians of the follower's joint for one of the leader's. */
  readonly gain: number;
  /** Metres that the tip moves for a radian of that joint, in the worst pose. */
  readonly leverM: number;
  /** Joints of that follower that are fed at all: its jitter is shared out among them. */
  readonly sharedBy: number;
}

export interface Suggestion {
  /** One-euro cutoff at standstill, hertz; null: needs no smoothing. */
  readonly cutoffHz: number | null;
  /** Delay that this adds to a slow motion, seconds. */
  readonly lagS: number;
  /** One a feed: root mean square of the tip that is left by this joint, metres. */
  readonly tipM: readonly number[];
  /** One a feed: deadband that takes away the rest where smoothing may not go so far, radians; 0: none needed. */
  readonly deadbandRad: readonly number[];
}

/**
 * Peaks of noise rise over so many standard deviations about twice a minute at a hundred readings a second (the tail of
 * a normal distribution beyond 3.5 sigma is 1 in 2150).
 */
const PEAK_SIGMAS = 3.5;

/**
 * The lightest smoothing that keeps each follower's tip as still as wished; where that would lag more than wished, the
 * strongest that does not, and a deadband for what is left.
 *
 * A first-order low-pass that takes in the share a of each new value leaves a / (2 - a) of white noise's variance
 * (A. V. Oppenheim, R. W. Schafer, Discrete-Time Signal Processing, output variance of a first-order system), and delays
 * a ramp by 1 / (2 pi fc).
 * @param rateHz readings a second
 */
export function suggest(joint: SuggestJoint, wish: SuggestWish, rateHz: number): Suggestion {
  const raw = joint.feeds.map((feed) => joint.noiseRad * Math.abs(feed.gain) * feed.leverM);
  const allowed = joint.feeds.map((feed) => wish.jitterM / Math.sqrt(feed.sharedBy));
  const ratio = Math.min(1, ...raw.map((jitter, i) => ((allowed[i] as number) / jitter) ** 2));
  const wished = ratio >= 1 ? null : cutoffOf((2 * ratio) / (1 + ratio), rateHz);
  const least = 1 / (2 * Math.PI * wish.lagS);
  const cutoffHz = wished === null ? null : Math.max(wished, least);
  const left = cutoffHz === null ? 1 : Math.sqrt(varianceLeft(cutoffHz, rateHz));
  const tipM = raw.map((jitter) => jitter * left);
  return {
    cutoffHz,
    lagS: cutoffHz === null ? 0 : 1 / (2 * Math.PI * cutoffHz),
    tipM,
    deadbandRad: joint.feeds.map((feed, i) =>
      (tipM[i] as number) <= (allowed[i] as number) * (1 + ROUNDING)
        ? 0
        : PEAK_SIGMAS * joint.noiseRad * left * Math.abs(feed.gain),
    ),
  };
}

const ROUNDING = 1e-9;

/** The cutoff at which a low-pass takes in the share `a` of a new value: a = 1 / (1 + rate / (2 pi fc)). */
function cutoffOf(a: number, rateHz: number): number {
  return rateHz / (2 * Math.PI * (1 / a - 1));
}

/** Share of white noise's variance that such a low-pass lets through. */
export function varianceLeft(cutoffHz: number, rateHz: number): number {
  const a = 1 / (1 + rateHz / (2 * Math.PI * cutoffHz));
  return a / (2 - a);
}
