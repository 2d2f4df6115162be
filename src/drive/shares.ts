import { US_PER_S } from '../clock/clock.ts';
import type { Shared } from './shared.ts';

/**
 * The share of its speed limits a follower may use, by what it is doing: gentle while joining, rising if it cannot
 * catch up, and opening over a second once it has met the leader.
 */
export interface Shares {
  /** Joining (or parking) begins. */
  begin(): void;
  /** The leader is met. */
  meet(): void;
  /** Joining has taken so long that the share is rising. */
  impatient(): boolean;
  /** common.share[0] = what holds now, pace included. */
  joining(): void;
  following(): void;
  parking(): void;
}

/** A join that has not met in this time speeds up, so that a fast leader is met at all. */
const PATIENCE_US = 2 * US_PER_S;
/** How long the share then takes to rise to the whole limit. */
const RISE_US = 4 * US_PER_S;
/** How long the limits take to open after the meeting. */
const OPEN_US = US_PER_S;

/** @param index of the follower, whose entry of `common.opened` it keeps */
export function shares(joinShare: number, index: number, common: Shared): Shares {
  const { nowUs, pace, opened, share } = common;
  // Doubles start as doubles, so that the engine stores them in place.
  const at = { beganUs: Number.NaN, metUs: Number.NaN, share: Number.NaN };
  const lateUs = (): number => (nowUs[0] as number) - at.beganUs - PATIENCE_US;
  const risen = (): number => joinShare + (1 - joinShare) * Math.min(Math.max(lateUs() / RISE_US, 0), 1);
  return {
    begin() {
      at.beganUs = nowUs[0] as number;
    },
    meet() {
      at.metUs = nowUs[0] as number;
      at.share = risen();
      opened[index] = at.share;
    },
    impatient: () => lateUs() > 0,
    joining() {
      share[0] = risen() * (pace[0] as number);
    },
    following() {
      const open = Math.min(((nowUs[0] as number) - at.metUs) / OPEN_US, 1);
      opened[index] = at.share + (1 - at.share) * open;
      share[0] = opened[index] * (pace[0] as number);
    },
    parking() {
      share[0] = joinShare * (pace[0] as number);
    },
  };
}
