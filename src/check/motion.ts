import { chain } from '../arm/chain.ts';
import type { FollowerJointSpec, WholeArmSpec } from '../follower/spec.ts';
import { degreesOf, millimetresOf } from '../rig/units.ts';
import type { Look } from './looking.ts';

/** How a joint stops, and how far from its axis the arm can reach; null where the file gives no geometry of it. */
export interface JointMotion {
  /** Travel of a stop from full speed, which is also its lag behind a leader that moves so fast: v^2 / 2A. */
  readonly stopping_deg: number;
  /** The same at the link end farthest from the axis. */
  readonly stopping_mm: number | null;
  /** Farthest that any link end can be from the joint's axis. */
  readonly lever_mm: number | null;
  /** Farthest that the tip can be from it. */
  readonly tip_lever_mm: number | null;
}

export interface ArmMotion {
  /** Highest speed of any link end with all joints at their limits, under the cap if there is one. */
  readonly end_speed_max_mm_s: number | null;
  /** The same without the cap. */
  readonly end_speed_uncapped_mm_s: number | null;
  readonly end_speed_cap_mm_s: number | null;
  /** Where: one angle a joint, in joint order. */
  readonly end_speed_pose_deg: readonly number[] | null;
  /** At most what any link end travels while all joints stop from full speed at once. */
  readonly stopping_mm: number | null;
}

/** Reduced speed of ISO 10218-1:2025, 5.5.3 (as quoted by gt-engineering.it): a borrowed figure, no claim of conformity. */
export const REDUCED_SPEED_MM_S = 250;

function stoppingRad({ speedRadS, accelRadS2 }: FollowerJointSpec): number {
  return speedRadS ** 2 / (2 * accelRadS2);
}

/** @param whole null: nothing is known in millimetres */
export function jointMotions(
  joints: readonly FollowerJointSpec[],
  whole: WholeArmSpec | null,
  look: Look | null,
): readonly JointMotion[] {
  const links = whole?.arm.links ?? [];
  return joints.map((joint, j) => {
    const stopRad = stoppingRad(joint);
    const link = links.findIndex((one) => one.joint === j);
    const levers = whole === null || look === null || link < 0 ? null : leversM(whole, link, look);
    return {
      stopping_deg: degreesOf(stopRad),
      stopping_mm: levers === null ? null : millimetresOf(stopRad * levers.end),
      lever_mm: levers === null ? null : millimetresOf(levers.end),
      tip_lever_mm: levers === null ? null : millimetresOf(levers.tip),
    };
  });
}

function leversM(whole: WholeArmSpec, link: number, look: Look): { readonly end: number; readonly tip: number } {
  const poser = chain(whole.arm);
  const jacobian = new Float64Array(3 * poser.links);
  const leverAt = (end: number): number => {
    poser.jacobian(poser.at, 3 * end, end - 1, jacobian);
    return Math.hypot(jacobian[3 * link] as number, jacobian[3 * link + 1] as number, jacobian[3 * link + 2] as number);
  };
  const tip = look((angles) => {
    poser.pose(angles);
    return leverAt(poser.links);
  }).value;
  const end = look((angles) => {
    poser.pose(angles);
    let most = 0;
    for (let k = link + 1; k <= poser.links; k++) most = Math.max(most, leverAt(k));
    return most;
  }).value;
  return { end, tip };
}

const UNKNOWN: ArmMotion = {
  end_speed_max_mm_s: null,
  end_speed_uncapped_mm_s: null,
  end_speed_cap_mm_s: null,
  end_speed_pose_deg: null,
  stopping_mm: null,
};

/** @param whole null: nothing is known in millimetres */
export function armMotion(
  whole: WholeArmSpec | null,
  joints: readonly FollowerJointSpec[],
  look: Look | null,
  motions: readonly JointMotion[],
): ArmMotion {
  if (whole === null || look === null) return UNKNOWN;
  const { value, poseRad } = look(fastestEnd(whole, joints));
  const capM = whole.endSpeedMS;
  const summed = motions.reduce((sum, { stopping_mm }) => sum + (stopping_mm ?? 0), 0);
  // Under a cap no link end is ever faster, and the slowest joint has stopped by then.
  const longestS = Math.max(...whole.arm.links.map(({ joint }) => stopS(joints[joint])));
  return {
    end_speed_max_mm_s: millimetresOf(Math.min(value, capM ?? Number.POSITIVE_INFINITY)),
    end_speed_uncapped_mm_s: millimetresOf(value),
    end_speed_cap_mm_s: capM === null ? null : millimetresOf(capM),
    end_speed_pose_deg: [...poseRad].map(degreesOf),
    stopping_mm: Math.min(summed, capM === null ? Number.POSITIVE_INFINITY : millimetresOf(capM * longestS)),
  };
}

function stopS(joint: FollowerJointSpec | undefined): number {
  return joint === undefined ? 0 : joint.speedRadS / joint.accelRadS2;
}

/** Speed of the fastest link end at a pose, m/s, when every joint turns at its limit, whichever way is worst. */
function fastestEnd(whole: WholeArmSpec, joints: readonly FollowerJointSpec[]): (anglesRad: Float64Array) => number {
  const poser = chain(whole.arm);
  const { links } = poser;
  const jacobian = new Float64Array(3 * links);
  const speeds = Float64Array.from(whole.arm.links, ({ joint }) => joints[joint]?.speedRadS ?? 0);
  return (anglesRad) => {
    poser.pose(anglesRad);
    let fastest = 0;
    for (let end = 1; end <= links; end++) {
      poser.jacobian(poser.at, 3 * end, end - 1, jacobian);
      // All ways to turn, but for turning everything round.
      for (let ways = 0; ways < 2 ** (end - 1); ways++) {
        let x = 0;
        let y = 0;
        let z = 0;
        for (let i = 0; i < end; i++) {
          const speed = (ways >> i) & 1 ? -(speeds[i] as number) : (speeds[i] as number);
          x += speed * (jacobian[3 * i] as number);
          y += speed * (jacobian[3 * i + 1] as number);
          z += speed * (jacobian[3 * i + 2] as number);
        }
        fastest = Math.max(fastest, x * x + y * y + z * z);
      }
    }
    return Math.sqrt(fastest);
  };
}
