import { bodies, GRAVITY_MS2 } from './bodies.ts';
import { chain as makeChain, timesInto } from './chain.ts';
import { loadBounds } from './load-bounds.ts';
import { passive } from './passive.ts';
import type { ArmSpec, LinkSpec } from './spec.ts';

/**
 * Static load of an arm: the torque about each joint's axis, right-handed, that its motor must supply to hold a pose
 * still against the weight of everything beyond it, its spring and its cable. Drag helps a motor to hold, by an amount
 * nobody knows; so it counts only while moving.
 */
export interface Loads {
  /**
   * out[j] = torque of joint j at a pose, newton metres; 0 for a joint without a link.
   * @param anglesRad one a joint of the profile
   */
  torqueNm(anglesRad: Float64Array, out: Float64Array): void;
  /**
   * out[j] = share of what joint j's motor may give: |torque| against its stall torque times `holdUse`, or, moving,
   * |torque| + drag against stall torque times `use`. Above 1 is over; NaN where the file knows no motor.
   */
  shares(anglesRad: Float64Array, holding: boolean, out: Float64Array): void;
  /** out[j] = the greater of both shares: an arm must be able to go on, and to stop anywhere. */
  worst(anglesRad: Float64Array, out: Float64Array): void;
  /** How quickly the shares of `worst` can change: see `LoadBounds`, as shares instead of newton metres. */
  readonly slope: Float64Array;
  readonly bend: Float64Array;
}

/** @param joints how many the profile has */
export function loads(spec: ArmSpec, joints: number): Loads {
  const chain = makeChain(spec);
  const { links, joint, at, turn, axis } = chain;
  const { massKg, momentKgM } = bodies(spec);
  const pulls = passive(spec);
  const torque = new Float64Array(links);
  /** Mass beyond a joint, and its first moment along x and y. */
  const beyond = new Float64Array(3);
  const moment = new Float64Array(3);
  const byJoint = new Float64Array(joints);
  const held = new Float64Array(joints);
  const limitOf = (share: (motor: NonNullable<LinkSpec['motor']>) => number): Float64Array =>
    Float64Array.from(spec.links, ({ motor }) => (motor === null ? Number.NaN : motor.stallNm * share(motor)));
  const holdNm = limitOf(({ holdUse }) => holdUse);
  const moveNm = limitOf(({ use }) => use);
  const dragNm = Float64Array.from(spec.links, (link) => link.dragNm);
  const bounds = loadBounds(spec, joints);
  const slope = new Float64Array(joints).fill(Number.NaN);
  const bend = new Float64Array(joints).fill(Number.NaN);
  for (let i = 0; i < links; i++) {
    const j = joint[i] as number;
    const least = Math.min(holdNm[i] as number, moveNm[i] as number);
    slope[j] = (bounds.slopeNm[j] as number) / least;
    bend[j] = (bounds.bendNm[j] as number) / least;
  }

  const hold = (anglesRad: Float64Array): void => {
    chain.pose(anglesRad);
    beyond.fill(0);
    for (let i = links - 1; i >= 0; i--) {
      const x = at[3 * i] as number;
      const y = at[3 * i + 1] as number;
      const kg = massKg[i] as number;
      timesInto(turn, 9 * i, momentKgM, 3 * i, moment, 0);
      beyond[0] = (beyond[0] as number) + kg;
      beyond[1] = (beyond[1] as number) + kg * x + (moment[0] as number);
      beyond[2] = (beyond[2] as number) + kg * y + (moment[1] as number);
      const rx = (beyond[1] as number) - (beyond[0] as number) * x;
      const ry = (beyond[2] as number) - (beyond[0] as number) * y;
      // Weight turns the joint by a . (r x (0, 0, -g)) = g (ay rx - ax ry); holding takes the opposite.
      torque[i] = GRAVITY_MS2 * ((axis[3 * i] as number) * ry - (axis[3 * i + 1] as number) * rx);
    }
    pulls.addHeld(anglesRad, torque);
  };

  const sharesOf = (holding: boolean, out: Float64Array): void => {
    out.fill(Number.NaN);
    for (let i = 0; i < links; i++) {
      const size = Math.abs(torque[i] as number);
      out[joint[i] as number] = holding
        ? size / (holdNm[i] as number)
        : (size + (dragNm[i] as number)) / (moveNm[i] as number);
    }
  };

  return {
    slope,
    bend,
    torqueNm(anglesRad, out) {
      hold(anglesRad);
      out.fill(0);
      for (let i = 0; i < links; i++) out[joint[i] as number] = torque[i] as number;
    },
    shares(anglesRad, holding, out) {
      hold(anglesRad);
      sharesOf(holding, out);
    },
    worst(anglesRad, out) {
      hold(anglesRad);
      sharesOf(true, held);
      sharesOf(false, byJoint);
      for (let j = 0; j < joints; j++) out[j] = Math.max(held[j] as number, byJoint[j] as number);
    },
  };
}
