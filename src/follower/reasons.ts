/** Why a follower, or one of its joints, does not simply do as the leader does. Bits, so that several can hold at once. */

/** What keeps a whole follower from following. */
export const BLOCKS = {
  /** Readings are too old. */
  stale: 1,
  /** The enable button is released. */
  enable: 2,
  /** The operator holds it (or has just rearmed or parked it): `join` goes on. */
  held: 4,
  /** Its port took nothing for longer than the timeout while it moved. */
  contact: 8,
  /** The leader's hold button is pressed. */
  pedal: 16,
  /** A bug of ours was caught; it is out for the rest of the run. */
  fault: 32,
} as const;

/** What holds one joint back. */
export const LIMITS = {
  /** The leader asks for more than the joint's range. */
  range: 1,
  /** It moves at its speed limit. */
  speed: 2,
  /** It stands inside its deadband, short of what the leader asks. */
  deadband: 4,
  /** A pot that feeds it is sick. */
  sick: 8,
  /** A link end of the arm moves at its cap. */
  end_speed: 16,
  /** A link would enter a keep-out. */
  keep_out: 32,
  /** A joint would carry more than its motor may. */
  load: 64,
  /** The leader's tip is where this arm's tip cannot be: it goes to the nearest place. */
  reach: 128,
} as const;
