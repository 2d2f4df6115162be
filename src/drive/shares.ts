import { US_PER_S } from '../clock/clock.ts';

/**
 * The share of its speed limits a follower may use, by what it is doing: gentle while joining, rising if it cannot
 * catch up, and opening over a second once it has met the leader.
 */
export interface Shares {
  /** What a follower that follows may use, pace apart. */
  readonly opened: Float64Array;
  /** Joining (or parking) begins. */
  begin(nowUs: Float64Array): void;
  /** The leader is met. */
  meet(nowUs: Float64Array): void;
  /** Joining has taken so long that the share is rising. */
  impatient(nowUs: Float64Array): boolean;
  /** share[0] = what holds now, times pace[0]. */
  joining(nowUs: Float64Array, pace: Float64Array, share: Float64Array): void;
  following(nowUs: Float64Array, pace: Float64Array, share: Float64Array): void;
  parking(pace: Float64Array, share: Float64Array): void;
}

/** A join that has not met in this time speeds up, so that a fast leader is met at all. */
const PATIENCE_US = 2 * US_PER_S;
/** How long the share then takes to rise to the whole limit. */
const RISE_US = 4 * US_PER_S;
/** How long the limits take to open after the meeting. */
const OPEN_US = US_PER_S;

export function shares(joinShare: number): Shares {
  const began = new Float64Array(1);
  const met = new Float64Array(1);
  const shareAtMeeting = new Float64Array(1);
  const opened = new Float64Array(1);
  const lateUs = (nowUs: Float64Array): number => (nowUs[0] as number) - (began[0] as number) - PATIENCE_US;
  const risen = (nowUs: Float64Array): number =>
    joinShare + (1 - joinShare) * Math.min(Math.max(lateUs(nowUs) / RISE_US, 0), 1);
  return {
    opened,
    begin(nowUs) {
      began[0] = nowUs[0] as number;
    },
    meet(nowUs) {
      met[0] = nowUs[0] as number;
      shareAtMeeting[0] = risen(nowUs);
      opened[0] = shareAtMeeting[0];
    },
    impatient: (nowUs) => lateUs(nowUs) > 0,
    joining(nowUs, pace, share) {
      share[0] = risen(nowUs) * (pace[0] as number);
    },
    following(nowUs, pace, share) {
      const from = shareAtMeeting[0] as number;
      const open = Math.min(((nowUs[0] as number) - (met[0] as number)) / OPEN_US, 1);
      opened[0] = from + (1 - from) * open;
      share[0] = opened[0] * (pace[0] as number);
    },
    parking(pace, share) {
      share[0] = joinShare * (pace[0] as number);
    },
  };
}
