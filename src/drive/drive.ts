import { followers as makeFollowers } from '../follower/follower.ts';
import { followerStage, type FollowerStage, type Start } from './follower-stage.ts';
import { leaderStage, type LeaderStage } from './leader-stage.ts';
import type { Plan } from './plan.ts';
import { shared, type Shared } from './shared.ts';
import { shares } from './shares.ts';

/**
 * One leader and its followers as a fold over events. The stages are joined by a stream in `bridge/pipeline`; each event
 * must reach the leader's stage first and then every follower's, in rig order.
 */
export interface Drive {
  readonly plan: Plan;
  readonly common: Shared;
  readonly leader: LeaderStage;
  readonly followers: readonly FollowerStage[];
  /** The next instant at which a tick is due although nothing arrives; Infinity when there is none. */
  dueUs(): number;
}

/**
 * @param starts how each follower stands, in rig order
 * @param startUs instant at which the drive begins, integer microseconds
 */
export function drive(plan: Plan, starts: readonly Start[], startUs: number): Drive {
  const common = shared(
    startUs,
    starts.map((s) => s.board),
    plan.pace,
  );
  const leader = leaderStage(plan, common);
  const share = shares(
    plan.followers.map((spec) => spec.joinShare),
    common,
  );
  const onBoard = Array.from(common.busy, (): FollowerStage[] => []);
  const followers = makeFollowers(plan.followers).map((arm, f) => {
    const start = starts[f] as Start;
    return followerStage(arm, f, { lead: leader, common, share }, start, onBoard[start.board] as FollowerStage[]);
  });
  return {
    plan,
    common,
    leader,
    followers,
    dueUs() {
      let due = leader.dueUs();
      for (const follower of followers) due = Math.min(due, follower.dueUs());
      return due;
    },
  };
}
