import type { FollowerSpec } from '../follower/spec.ts';
import type { LeaderSpec } from '../leader/spec.ts';

/** One leader and its followers, and how they are tied: all the drive has to know. */
export interface Plan {
  readonly leader: LeaderSpec;
  readonly followers: readonly FollowerSpec[];
  /** All following arms keep step with the slowest. */
  readonly unison: boolean;
  /** Share of every speed limit, 0 to 1. */
  readonly pace: number;
}
