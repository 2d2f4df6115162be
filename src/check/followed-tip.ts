import { spread } from '../arm/spread.ts';
import { remap } from '../follower/remap.ts';
import { tipWish } from '../follower/tip-wish.ts';
import { reachM } from '../arm/extent.ts';
import { millimetresOf } from '../rig/units.ts';
import type { FollowerSubject } from './subject.ts';

/** What of the places that the leader's tip can be in a follower's tip can follow to. Keep-outs and the governor aside. */
export interface FollowedTip {
  /** Share of poses of the leader, spread over its whole travel, 0 to 1. */
  readonly tip_followed_share: number | null;
  /** Farthest that the tip stays behind in one of them, millimetres. */
  readonly tip_left_mm: number | null;
}

const POSES = 400;
/** A pose far from the one before takes several calls to be reached. */
const CALLS_MAX = 60;
/** A tip this near its target follows, as a share of the reach. */
const NEAR_SHARE = 0.002;
/** A call that brings the tip no nearer than this has settled, metres. */
const SETTLED_M = 1e-6;

/** Null in both for a follower that copies joints, or is looked at alone. */
export function followedTip({ spec, leader }: FollowerSubject): FollowedTip {
  const { whole, joints } = spec;
  if (leader === null || whole === undefined || whole.tip === null)
    return { tip_followed_share: null, tip_left_mm: null };
  const wish = tipWish(whole, whole.tip, joints);
  const { mix } = remap(spec);
  const places = spread(leader.spec.joints.length);
  const pose = new Float64Array(leader.spec.joints.length);
  const wanted = new Float64Array(joints.length);
  const nearM = NEAR_SHARE * reachM(whole.arm);

  /** How far the tip stays from its target once it comes no nearer. */
  const leftM = (): number => {
    let left = Number.POSITIVE_INFINITY;
    for (let call = 0; call < CALLS_MAX; call++) {
      mix(pose, wanted);
      wish.reach(pose, wanted);
      const now = wish.leftM[0] as number;
      if (Math.abs(left - now) < SETTLED_M) return now;
      left = now;
    }
    return left;
  };

  let followed = 0;
  let mostM = 0;
  for (let n = 1; n <= POSES; n++) {
    for (const [j, { travelMin, travelMax, map }] of leader.spec.joints.entries())
      pose[j] = map.value(travelMin + places.at(n, j) * (travelMax - travelMin));
    const left = leftM();
    if (left <= nearM) followed++;
    mostM = Math.max(mostM, left);
  }
  return { tip_followed_share: followed / POSES, tip_left_mm: millimetresOf(mostM) };
}
