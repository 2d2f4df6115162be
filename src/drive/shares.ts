import { US_PER_S } from '../clock/clock.ts';
import type { Shared } from './shared.ts';

/**
 * The share of its speed limits that follower `f` may use, by what it is doing: gentle while joining, rising if it cannot
 * catch up, and opening over a second once it has met the leader.
 */
export interface Shares {
  /** Joining (or parking) begins. */
  begin(f: number): void;
  /** The leader is met. */
  meet(f: number): void;
  /** Joining has taken so long that the share is rising. */
  impatient(f: number): boolean;
  /** common.share[0] = what holds now, pace included. */
  joining(f: number): void;
  following(f: number): void;
  parking(f: number): void;
}

/** A join that has not met in this time speeds up, so that a fast leader is met at all. */
const PATIENCE_US = 2 * US_PER_S;
/** How long the share then takes to rise to the whole limit. */
const RISE_US = 4 * US_PER_S;
/** How long the limits take to open after the meeting. */
const OPEN_US = US_PER_S;

/** @param joinShares of the followers, in rig order, whose entries of `common.opened` it keeps */
export function shares(joinShares: readonly number[], common: Shared): Shares {
  const { nowUs, pace, opened, share } = common;
  const least = Float64Array.from(joinShares);
  const beganUs = new Float64Array(least.length).fill(Number.NaN);
  const metUs = new Float64Array(least.length).fill(Number.NaN);
  const shareMet = new Float64Array(least.length).fill(Number.NaN);
  const lateUs = (f: number): number => (nowUs[0] as number) - (beganUs[f] as number) - PATIENCE_US;
  const risen = (f: number): number => {
    const from = least[f] as number;
    return from + (1 - from) * Math.min(Math.max(lateUs(f) / RISE_US, 0), 1);
  };
  return {
    begin(f) {
      beganUs[f] = nowUs[0] as number;
    },
    meet(f) {
      metUs[f] = nowUs[0] as number;
      shareMet[f] = risen(f);
      opened[f] = shareMet[f] as number;
    },
    impatient: (f) => lateUs(f) > 0,
    joining(f) {
      share[0] = risen(f) * (pace[0] as number);
    },
    following(f) {
      const from = shareMet[f] as number;
      opened[f] = from + (1 - from) * Math.min(((nowUs[0] as number) - (metUs[f] as number)) / OPEN_US, 1);
      share[0] = (opened[f] as number) * (pace[0] as number);
    },
    parking(f) {
      share[0] = (least[f] as number) * (pace[0] as number);
    },
  };
}
