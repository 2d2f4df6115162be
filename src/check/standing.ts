import type { ArmSpec } from '../arm/spec.ts';
import { tipping } from '../arm/tipping.ts';
import type { FollowerJointSpec } from '../follower/spec.ts';
import { degreesOf } from '../rig/units.ts';
import type { Look } from './looking.ts';

/** How safely a base stands, with the payload or without, whichever is worse; null where it cannot be told, or is bolted. */
export interface Standing {
  /** Least moment that still holds it down, with all joints accelerating as hard as they may; below 0 it can tip. */
  readonly tipping_margin_nm: number | null;
  /** The same while it stands still. */
  readonly tipping_static_nm: number | null;
  /** Where: one angle a joint, in joint order. */
  readonly tipping_pose_deg: readonly number[] | null;
  /** Least friction that is left over; below 0 it can slide. */
  readonly sliding_margin_n: number | null;
}

const UNKNOWN: Standing = {
  tipping_margin_nm: null,
  tipping_static_nm: null,
  tipping_pose_deg: null,
  sliding_margin_n: null,
};

/** @param look null: the geometry is not known */
export function standing(arm: ArmSpec | null, joints: readonly FollowerJointSpec[], look: Look | null): Standing {
  if (arm === null || look === null) return UNKNOWN;
  const bounds = {
    speedRadS: joints.map(({ speedRadS }) => speedRadS),
    accelRadS2: joints.map(({ accelRadS2 }) => accelRadS2),
  };
  const both = arm.payload === null ? [arm] : [arm, { ...arm, payload: null }];
  const margins = both.flatMap((spec) => tipping(spec, bounds) ?? []);
  if (margins.length === 0) return UNKNOWN;
  const least = (margin: (of: (typeof margins)[number], angles: Float64Array) => number) =>
    margins
      .map((one) => look((angles) => -margin(one, angles)))
      .reduce((worse, one) => (one.value > worse.value ? one : worse));
  const moving = least((one, angles) => one.movingNm(angles));
  const hasFriction = arm.base.friction !== null;
  return {
    tipping_margin_nm: -moving.value,
    tipping_static_nm: -least((one, angles) => one.staticNm(angles)).value,
    tipping_pose_deg: [...moving.poseRad].map(degreesOf),
    sliding_margin_n: hasFriction ? -least((one, angles) => one.slidingN(angles) ?? Number.NaN).value : null,
  };
}
