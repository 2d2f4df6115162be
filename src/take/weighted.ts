import { reachM } from '../arm/extent.ts';
import type { Plan } from '../drive/plan.ts';
import { takeFault, type TakeFault } from './fault.ts';
import type { Take } from './reader.ts';

/**
 * How much longer each follower takes over a motion, so that a large arm moves with the weight it has: the root of its
 * size over the leader's (or the smallest follower's, where the leader's is not known), as a pendulum's period goes with
 * the root of its length (Froude scaling of time under gravity). In unison all keep the time of the slowest.
 */
export function weights(take: Take, plan: Plan): readonly number[] | TakeFault {
  const reaches = plan.followers.map((spec) => (spec.whole === undefined ? Number.NaN : reachM(spec.whole.arm)));
  const lacking = plan.followers.find((_, f) => Number.isNaN(reaches[f]));
  if (lacking !== undefined)
    return takeFault('TAKE_ARM', take.name, `${lacking.name} has no arm: in its file, so its size is not known`);
  const leader = take.header.leader.arm;
  const size = leader === null ? Math.min(...reaches) : reachM(leader);
  const own = reaches.map((reach) => timeScale(reach / size));
  return plan.unison ? own.map(() => Math.max(...own)) : own;
}

/** @param scale follower lengths for one of the leader's */
export function timeScale(scale: number): number {
  return Math.sqrt(scale);
}
