import { US_PER_S } from '../clock/clock.ts';
import { governor, type JointLimits } from '../follower/governor.ts';
import type { FollowerSpec } from '../follower/spec.ts';

/**
 * A virtual leader that moves only as fast as every following arm can: one governor in leader space, its limits pulled
 * back from the followers through their weights and gains (V_L = min V / sum |weight gain|, A alike).
 */
export interface Unison {
  readonly poseRad: Float64Array;
  readonly speedRadS: Float64Array;
  /**
   * Counts only followers whose entry of `following` is 1, each with the share `opened` of its speed limits, times
   * pace[0].
   */
  limit(following: Uint8Array, opened: Float64Array, pace: Float64Array): void;
  /** Moves straight towards the real pose by the time since the last call. */
  advance(realRad: Float64Array, nowUs: Float64Array): void;
  /** Takes the real pose over where nothing may hold it back: joints without an angle yet, joints that no arm follows. */
  meet(realRad: Float64Array): void;
}

/** For a joint that no arm follows: it is where the hand is, and only has to stay finite, rad/s^2. */
const FREE_RAD_S2 = 1e5;
const CLOSE_RAD = 1e-6;

export function unison(followers: readonly FollowerSpec[], joints: number): Unison {
  const anywhere: JointLimits = { accelRadS2: FREE_RAD_S2, minRad: -Infinity, maxRad: Infinity };
  const motion = governor(Array.from({ length: joints }, () => anywhere));
  const speed = new Float64Array(joints).fill(Infinity);
  const deadband = new Float64Array(joints);
  const dtS = new Float64Array(1);
  const lastUs = new Float64Array([Number.NaN]);
  motion.x.fill(Number.NaN);
  motion.target.fill(Number.NaN);

  /** @param share of its speed limits */
  const pullBack = (spec: FollowerSpec, share: number): void => {
    for (const joint of spec.joints) {
      let reach = 0;
      for (const source of joint.sources) reach += Math.abs(source.weight * joint.gain);
      for (const source of joint.sources) {
        const i = source.joint;
        speed[i] = Math.min(speed[i] as number, (share * joint.speedRadS) / reach);
        motion.accel[i] = Math.min(motion.accel[i] as number, joint.accelRadS2 / reach);
        deadband[i] = Math.max(deadband[i] as number, joint.deadbandRad / reach);
      }
    }
  };

  const isFree = (i: number): boolean => speed[i] === Infinity || Number.isNaN(motion.x[i] as number);

  return {
    poseRad: motion.x,
    speedRadS: motion.v,
    limit(following, opened, pace) {
      speed.fill(Infinity);
      motion.accel.fill(FREE_RAD_S2);
      deadband.fill(0);
      for (let f = 0; f < followers.length; f++)
        if (following[f] === 1) pullBack(followers[f] as FollowerSpec, (opened[f] as number) * (pace[0] as number));
    },
    advance(realRad, nowUs) {
      const first = Number.isNaN(lastUs[0] as number);
      dtS[0] = first ? 0 : ((nowUs[0] as number) - (lastUs[0] as number)) / US_PER_S;
      lastUs[0] = nowUs[0] as number;
      let longestS = 0;
      for (let i = 0; i < joints; i++) {
        if (isFree(i)) continue;
        const real = realRad[i] as number;
        const d = deadband[i] as number;
        motion.target[i] = Math.min(Math.max(motion.target[i] as number, real - d), real + d);
        const away = Math.abs((motion.target[i] as number) - (motion.x[i] as number));
        longestS = Math.max(longestS, away / (speed[i] as number));
      }
      for (let i = 0; i < joints; i++) {
        motion.braking[i] = isFree(i) ? 1 : 0;
        const away = Math.abs((motion.target[i] as number) - (motion.x[i] as number)) + CLOSE_RAD;
        motion.speed[i] = longestS > 0 ? Math.min(speed[i] as number, away / longestS) : (speed[i] as number);
      }
      if ((dtS[0] as number) > 0) motion.step(dtS);
    },
    meet(realRad) {
      for (let i = 0; i < joints; i++) {
        if (!isFree(i)) continue;
        motion.x[i] = realRad[i] as number;
        motion.v[i] = 0;
        motion.target[i] = realRad[i] as number;
      }
    },
  };
}
