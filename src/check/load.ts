import { dynamics } from '../arm/dynamics.ts';
import { loads } from '../arm/load.ts';
import type { ArmSpec, LinkSpec } from '../arm/spec.ts';
import type { FollowerJointSpec } from '../follower/spec.ts';
import type { Arm } from '../rig/schema/arm.ts';
import { degreesOf } from '../rig/units.ts';
import type { Look } from './looking.ts';

/** Worst torques of a joint over its whole range, in newton metres; null where the file gives no masses or no motor. */
export interface JointLoad {
  /** To hold still, with the payload or without, whichever is worse. */
  readonly load_worst_nm: number | null;
  /** As a share of what the motor may hold. */
  readonly load_share: number | null;
  /** Where: one angle a joint, in joint order. */
  readonly load_worst_pose_deg: readonly number[] | null;
  /** Whether that is with the payload. */
  readonly load_worst_with_payload: boolean | null;
  readonly load_empty_nm: number | null;
  readonly load_full_nm: number | null;
  /** Stall torque times hold_use, less the worst. */
  readonly load_margin_nm: number | null;
  /** At most, while all joints speed up and turn as hard as they may. */
  readonly moving_worst_nm: number | null;
  /** As a share of what the motor may use. */
  readonly moving_share: number | null;
  /** Friction of the joint, as the file gives it. */
  readonly drag_nm: number | null;
}

/** Of a joint about which the file says too little. */
const LOAD_UNKNOWN: JointLoad = {
  load_worst_nm: null,
  load_share: null,
  load_worst_pose_deg: null,
  load_worst_with_payload: null,
  load_empty_nm: null,
  load_full_nm: null,
  load_margin_nm: null,
  moving_worst_nm: null,
  moving_share: null,
  drag_nm: null,
};

/**
 * @param file the arm as its file gives it: there, a link without a mass is told from one that weighs nothing
 * @param look null: the geometry is not known
 */
export function jointLoads(
  arm: ArmSpec | null,
  file: Arm | undefined,
  joints: readonly FollowerJointSpec[],
  look: Look | null,
): readonly JointLoad[] {
  if (arm === null || file === undefined || look === null) return joints.map(() => LOAD_UNKNOWN);
  const empty: ArmSpec = { ...arm, payload: null };
  return joints.map((_, j) => {
    const i = arm.links.findIndex(({ joint }) => joint === j);
    const link = arm.links[i];
    if (link === undefined || file.links.slice(i).some(({ mass_g }) => mass_g === undefined)) return LOAD_UNKNOWN;
    const without = held(empty, joints, j, look);
    const full = arm.payload === null ? without : held(arm, joints, j, look);
    const worse = full.nm >= without.nm ? full : without;
    const moving = Math.max(...[empty, arm].map((spec) => movingNm(spec, joints, i, look)));
    return {
      load_worst_nm: worse.nm,
      load_worst_pose_deg: [...worse.poseRad].map(degreesOf),
      load_worst_with_payload: arm.payload === null ? null : worse === full,
      load_empty_nm: without.nm,
      load_full_nm: full.nm,
      moving_worst_nm: moving,
      drag_nm: link.dragNm,
      ...againstMotor(link, worse.nm, moving),
    };
  });
}

function againstMotor(
  { motor }: LinkSpec,
  heldNm: number,
  moving: number,
): Pick<JointLoad, 'load_share' | 'load_margin_nm' | 'moving_share'> {
  if (motor === null) return { load_share: null, load_margin_nm: null, moving_share: null };
  const mayHold = motor.stallNm * motor.holdUse;
  return {
    load_share: heldNm / mayHold,
    load_margin_nm: mayHold - heldNm,
    moving_share: moving / (motor.stallNm * motor.use),
  };
}

interface Held {
  readonly nm: number;
  readonly poseRad: Float64Array;
}

function held(arm: ArmSpec, joints: readonly FollowerJointSpec[], j: number, look: Look): Held {
  const { torqueNm } = loads(arm, joints.length);
  const torque = new Float64Array(joints.length);
  const { value, poseRad } = look((angles) => {
    torqueNm(angles, torque);
    return Math.abs(torque[j] as number);
  });
  return { nm: value, poseRad };
}

/**
 * Weight, plus what accelerating all joints adds, each the worse way, plus what their speeds do to each other in that
 * pose, plus drag: a bound, because all of it seldom comes together.
 */
function movingNm(arm: ArmSpec, joints: readonly FollowerJointSpec[], link: number, look: Look): number {
  const j = (arm.links[link] as LinkSpec).joint;
  const { torqueNm } = loads(arm, joints.length);
  const { torqueNm: movedNm, inertialNm } = dynamics(arm);
  const torque = new Float64Array(joints.length);
  const unit = new Float64Array(joints.length);
  unit[j] = 1;
  const column = new Float64Array(joints.length);
  const { value, poseRad } = look((angles) => {
    torqueNm(angles, torque);
    // The mass matrix is symmetric: its column is the row that this joint's torque needs.
    inertialNm(angles, unit, column);
    return joints.reduce(
      (sum, { accelRadS2 }, k) => sum + Math.abs(column[k] as number) * accelRadS2,
      Math.abs(torque[j] as number),
    );
  });
  torqueNm(poseRad, torque);
  const drag = (arm.links[link] as LinkSpec).dragNm;
  return value + drag + speedPart(arm, joints, j, poseRad, torque[j] as number, movedNm);
}

/** Most that the joints' speeds, each whichever way, add to a joint's torque at a pose; drag aside. */
function speedPart(
  arm: ArmSpec,
  joints: readonly FollowerJointSpec[],
  j: number,
  poseRad: Float64Array,
  weightNm: number,
  torqueNm: ReturnType<typeof dynamics>['torqueNm'],
): number {
  const speeds = new Float64Array(joints.length);
  const still = new Float64Array(joints.length);
  const out = new Float64Array(joints.length);
  const drag = arm.links.find(({ joint }) => joint === j)?.dragNm ?? 0;
  let most = 0;
  for (let ways = 0; ways < 2 ** arm.links.length; ways++) {
    for (const [i, { joint }] of arm.links.entries())
      speeds[joint] = ((ways >> i) & 1 ? -1 : 1) * (joints[joint]?.speedRadS ?? 0);
    torqueNm(poseRad, speeds, still, out);
    most = Math.max(most, Math.abs((out[j] as number) - Math.sign(speeds[j] as number) * drag - weightNm));
  }
  return most;
}
