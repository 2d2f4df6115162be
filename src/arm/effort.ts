import { dynamics } from './dynamics.ts';
import type { ArmSpec } from './spec.ts';

/** How much of a wished acceleration the motors of an arm can give. */
export interface Effort {
  /**
   * out[0] = greatest share of `accelsRadS2`, 0 to 1, at which no motor needs more than its stall torque times `use`. A
   * joint that is over it without any acceleration is not asked: slowing the others down would not help it. For
   * speeding up only: a brake is never made weaker.
   */
  share(anglesRad: Float64Array, speedsRadS: Float64Array, accelsRadS2: Float64Array, out: Float64Array): void;
}

/** @param joints how many the profile has */
export function effort(spec: ArmSpec, joints: number): Effort {
  const { torqueNm, inertialNm } = dynamics(spec);
  const still = new Float64Array(joints);
  const steady = new Float64Array(joints);
  const extra = new Float64Array(joints);
  const limitNm = new Float64Array(joints).fill(Number.POSITIVE_INFINITY);
  for (const { joint, motor } of spec.links) if (motor !== null) limitNm[joint] = motor.stallNm * motor.use;

  return {
    share(anglesRad, speedsRadS, accelsRadS2, out) {
      torqueNm(anglesRad, speedsRadS, still, steady);
      inertialNm(anglesRad, accelsRadS2, extra);
      let share = 1;
      for (let j = 0; j < joints; j++) {
        const limit = limitNm[j] as number;
        const without = steady[j] as number;
        if (Math.abs(without) >= limit) continue;
        const more = extra[j] as number;
        const room = more < 0 ? limit + without : limit - without;
        if (Math.abs(more) > room) share = Math.min(share, room / Math.abs(more));
      }
      out[0] = share;
    },
  };
}
