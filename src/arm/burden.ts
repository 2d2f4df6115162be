import { unloaded, worstNm } from './balance.ts';
import { pointMasses } from './bodies.ts';
import { dynamics } from './dynamics.ts';
import { tipping } from './tipping.ts';
import type { ArmSpec } from './spec.ts';
import { worst } from './worst.ts';

/** What an arm asks of its base and its motors: compared before and after, it is what a counterweight costs. */
export interface Burden {
  /** Everything that turns, payload and all: what the first bearing carries, kilograms. */
  readonly movingKg: number;
  readonly joints: readonly JointBurden[];
  /** Least restoring minus overturning moment of its weight, newton metres; null for an arm that is bolted. */
  readonly tippingNm: number | null;
}

export interface JointBurden {
  readonly joint: number;
  /** Greatest inertia about the joint's axis with the others still, kilogram square metres. */
  readonly inertiaKgM2: number;
  /** Acceleration that its motor has left where both load and inertia are greatest, rad/s^2; null without a motor. */
  readonly accelLeftRadS2: number | null;
}

/** Ranges in joint order, radians. */
export function burden(spec: ArmSpec, minRad: ArrayLike<number>, maxRad: ArrayLike<number>): Burden {
  const joints = spec.links.map(({ joint }) => joint);
  const n = minRad.length;
  const still = new Float64Array(n);
  const stands = tipping(spec, { speedRadS: still, accelRadS2: still });
  const bare = tipping(unloaded(spec), { speedRadS: still, accelRadS2: still });
  const least = (one: NonNullable<typeof stands>): number =>
    -worst({ minRad, maxRad, joints }, (pose) => -one.staticNm(pose)).value;
  return {
    movingKg: pointMasses(spec).reduce((sum, { massKg }) => sum + massKg, 0),
    joints: spec.links.map((link): JointBurden => {
      const inertiaKgM2 = greatestInertia(spec, link.joint, joints, minRad, maxRad);
      if (link.motor === null) return { joint: link.joint, inertiaKgM2, accelLeftRadS2: null };
      const left = link.motor.stallNm * link.motor.use - link.dragNm - worstNm(spec, link.joint, minRad, maxRad).value;
      return { joint: link.joint, inertiaKgM2, accelLeftRadS2: inertiaKgM2 === 0 ? null : left / inertiaKgM2 };
    }),
    tippingNm: stands === null || bare === null ? null : Math.min(least(stands), least(bare)),
  };
}

function greatestInertia(
  spec: ArmSpec,
  joint: number,
  joints: readonly number[],
  minRad: ArrayLike<number>,
  maxRad: ArrayLike<number>,
): number {
  const { inertialNm } = dynamics(spec);
  const unit = Float64Array.from(minRad, (_, j) => (j === joint ? 1 : 0));
  const torque = new Float64Array(minRad.length);
  return worst({ minRad, maxRad, joints }, (pose) => {
    inertialNm(pose, unit, torque);
    return torque[joint] as number;
  }).value;
}
