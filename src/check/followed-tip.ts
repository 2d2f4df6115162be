import { leversM, reachM } from '../arm/extent.ts';
import type { ArmSpec } from '../arm/spec.ts';
import { spread } from '../arm/spread.ts';
import { remap } from '../follower/remap.ts';
import type { FollowerSpec, TipSpec, WholeArmSpec } from '../follower/spec.ts';
import { tipWish } from '../follower/tip-wish.ts';
import type { TipWish } from '../follower/tip-wish.ts';
import type { LeaderSpec } from '../leader/spec.ts';
import { millimetresOf } from '../rig/units.ts';
import { radPerCount } from './resolution.ts';
import type { FollowerSubject } from './subject.ts';

/** What of the places that the leader's tip can be in a follower's tip can follow to. Keep-outs and the governor aside. */
export interface FollowedTip {
  /** Share of poses of the leader, spread over its whole travel, 0 to 1. */
  readonly tip_followed_share: number | null;
  /** Farthest that the tip stays behind in one of them, millimetres. */
  readonly tip_left_mm: number | null;
  /** Most that one step of the converter moves its target, at the steepest place of the map of the coarsest pot. */
  readonly tip_mm_per_count: number | null;
}

const POSES = 400;
/** A pose far from the one before takes several calls to be reached. */
const CALLS_MAX = 60;
/** A tip this near its target follows, as a share of the reach. */
const NEAR_SHARE = 0.002;
/** A call that brings the tip no nearer than this has settled, metres. */
const SETTLED_M = 1e-6;

/** Null in all for a follower that copies joints, or is looked at alone. */
export function followedTip({ spec, leader }: FollowerSubject): FollowedTip {
  const { whole } = spec;
  if (leader === null || whole === undefined || whole.tip === null)
    return { tip_followed_share: null, tip_left_mm: null, tip_mm_per_count: null };
  const follow = follower(spec, whole, whole.tip);
  const places = spread(leader.spec.joints.length);
  const pose = new Float64Array(leader.spec.joints.length);
  const nearM = NEAR_SHARE * reachM(whole.arm);
  let followed = 0;
  let mostM = 0;
  for (let n = 1; n <= POSES; n++) {
    for (const [j, { travelMin, travelMax, map }] of leader.spec.joints.entries())
      pose[j] = map.value(travelMin + places.at(n, j) * (travelMax - travelMin));
    const left = follow(pose, nearM);
    if (left <= nearM) followed++;
    mostM = Math.max(mostM, left);
  }
  return {
    tip_followed_share: followed / POSES,
    tip_left_mm: millimetresOf(mostM),
    tip_mm_per_count: millimetresOf(whole.tip.scale * stepM(leader.spec, whole.tip.leader)),
  };
}

/** How far the tip stays from its target at a pose of the leader, metres, whichever way round the arm bends. */
function follower(
  spec: FollowerSpec,
  whole: WholeArmSpec,
  tip: TipSpec,
): (poseRad: Float64Array, nearM: number) => number {
  const { askedRad, mix } = remap([spec]);
  const rows = { from: 0, to: spec.joints.length };
  const wanted = new Float64Array(spec.joints.length);
  const going = tipWish(whole, tip, spec.joints);

  const settled = (wish: TipWish, pose: Float64Array): number => {
    let left = Number.POSITIVE_INFINITY;
    for (let call = 0; call < CALLS_MAX; call++) {
      wanted.set(askedRad);
      wish.reach(pose, wanted);
      const now = wish.leftM[0] as number;
      if (Math.abs(left - now) < SETTLED_M) return now;
      left = now;
    }
    return left;
  };

  return (pose, nearM) => {
    mix(rows, pose);
    const left = settled(going, pose);
    if (left <= nearM) return left;
    // From the last place it may have bent the wrong way round: from where joints copy joints, it bends as the leader.
    const there = spec.joints.map((joint, j) => ({
      ...joint,
      restRad: Math.min(Math.max(askedRad[j] as number, joint.minRad), joint.maxRad),
    }));
    return Math.min(left, settled(tipWish(whole, tip, there), pose));
  };
}

/** Most that one step of the converter moves the leader's tip, metres. */
function stepM({ joints }: LeaderSpec, arm: ArmSpec): number {
  const levers = leversM(arm);
  const n = arm.links.length;
  return Math.max(
    ...arm.links.map(({ joint }, i) => {
      const source = joints[joint];
      return source === undefined ? 0 : radPerCount(source) * (levers[i * (n + 1) + n] as number);
    }),
  );
}
