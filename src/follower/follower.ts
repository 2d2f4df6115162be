import type { Frame } from '../wire/types.ts';
import { governor, type Governor } from './governor.ts';
import { LIMITS } from './reasons.ts';
import { remap } from './remap.ts';
import { servos } from './servos.ts';
import type { FollowerJointSpec, FollowerSpec, TipSpec } from './spec.ts';
import { tipWish } from './tip-wish.ts';
import { wholeArm } from './whole-arm.ts';

/**
 * The follower kernel: a pose in, a command out. It keeps what the arm was last told, for the follower's whole life;
 * whether it may move, and when, is decided in `drive/`.
 */
export interface Follower {
  readonly spec: FollowerSpec;
  readonly governor: Governor;
  /** What the leader asks for, clutch included, before deadband and range, radians. */
  readonly wantedRad: Float64Array;
  /** Deadbanded and inside the range, radians. */
  readonly targetRad: Float64Array;
  /** Bits of `LIMITS` for each joint. */
  readonly limits: Uint8Array;
  /** 1: a pot that feeds this joint is sick, and the joint holds. */
  readonly held: Uint8Array;
  /** Added to what the leader asks, radians; grows while the clutch is out. */
  readonly clutchRad: Float64Array;
  readonly frame: Frame;
  /** Puts the arm, standing, at a pose (clamped to its ranges): what the first pulse will say. */
  place(poseRad: Float64Array): void;
  /** Wishes for where the arm is, and starts the deadband anew from there. */
  settleHere(): void;
  /** Takes the leader's pose as the wish; `clutched`: the wish stays, and the offset takes up the difference. */
  want(leaderRad: Float64Array, clutched: boolean): void;
  /**
   * Takes a virtual leader's pose and speed, in unison: it is deadbanded and limited already, so every joint matches
   * it without lag.
   */
  match(leaderRad: Float64Array, leaderRadS: Float64Array): void;
  /** Sends every joint home instead. */
  wantRest(): void;
  /** Sets speed limits to `share[0]` of the profile's; `together`: joints slow down so that all arrive at once. */
  limitSpeed(share: Float64Array, together: boolean): void;
  /** One governed step of dtS[0] seconds, and its pulses into `frame`. */
  step(dtS: Float64Array): void;
  /** Brakes for dtS[0] seconds instead. */
  brake(dtS: Float64Array): void;
  /** Writes the pulses of the present angles into `frame`. */
  aim(): void;
  /**
   * Holds every joint that a sick pot feeds.
   * @param health codes of the leader's joints, 0 is sound
   * @returns true when a joint that was held is free again
   */
  hold(health: Uint8Array): boolean;
  /** True when it stands at its rest pose, up to rounding. */
  atRest(): boolean;
  /**
   * True when every joint that is free to move is within `withinRad` of its target; `lagging`: or as near as its
   * limits let it follow a moving one, v^2 / 2A.
   */
  near(withinRad: number, lagging: boolean): boolean;
  /** The same of the joints that the leader moves: the others nobody can bring near. */
  passed(withinRad: number): boolean;
}

/** A command this far outside its range is a bug of ours, not rounding, radians. */
const ROUNDING_RAD = 1e-9;
const STOPPED_SHORT = LIMITS.keep_out | LIMITS.load;
/** Slower than this a joint stands, rad/s. */
const STANDING_RAD_S = 1e-3;
/** A tip target left this far away is out of reach, metres. */
const OUT_OF_REACH_M = 0.001;
/** A joint counts as moving at its limit from this share of it on. */
const AT_LIMIT = 0.999;
/** A joint this close to its target hardly needs a share of the speed, radians. */
const CLOSE_RAD = 1e-6;

export function follower(spec: FollowerSpec): Follower {
  const joints = spec.joints;
  const n = joints.length;
  const motion = governor(joints);
  const map = remap(spec);
  const gears = servos(spec.servos);
  const tip = spec.whole?.tip ? tipWish(spec.whole, spec.whole.tip, joints) : null;
  const feeds = joints.map((joint, j) => feedsOf(joint, tip?.reaches[j] === 1 ? spec.whole?.tip : null));
  const whole = spec.whole === undefined ? null : wholeArm(spec.whole, motion, null);
  const rest = Float64Array.from(joints, (j) => j.restRad);
  const min = Float64Array.from(joints, (j) => j.minRad);
  const max = Float64Array.from(joints, (j) => j.maxRad);
  const top = Float64Array.from(joints, (j) => j.speedRadS);
  const wantedRad = Float64Array.from(rest);
  const mixed = new Float64Array(n);
  const clutchRad = new Float64Array(n);
  const clipped = new Uint8Array(n);
  const held = new Uint8Array(n);
  const limits = new Uint8Array(n);
  const frame: Frame = {
    pulsesUs: new Float64Array(spec.servos.length),
    sentUs: new Float64Array(spec.servos.length),
    anglesRad: motion.x,
    pulsing: 0,
  };
  const target = motion.target;
  /** Nobody leads the motion (joining, parking): link ends keep to a gentle speed. */
  let gentle = false;
  /** The motion is a wish, and may be refused for its load; going home may not. */
  let wishing = false;

  /** Writes what holds each joint back, as far as the wish tells, and lets the held ones brake. */
  const noteLimits = (): void => {
    const tooFar = tip !== null && (tip.leftM[0] as number) > OUT_OF_REACH_M;
    for (let j = 0; j < n; j++) {
      motion.braking[j] = held[j] as number;
      const inDeadband = target[j] !== wantedRad[j] && clipped[j] === 0;
      limits[j] =
        (tooFar && tip?.reaches[j] === 1 ? LIMITS.reach : 0) |
        (clipped[j] === 1 ? LIMITS.range : 0) |
        (inDeadband ? LIMITS.deadband : 0) |
        (held[j] === 1 ? LIMITS.sick : 0);
    }
  };

  const check = (): void => {
    for (let j = 0; j < n; j++) {
      const x = motion.x[j] as number;
      const inside = x >= (min[j] as number) - ROUNDING_RAD && x <= (max[j] as number) + ROUNDING_RAD;
      if (!inside) throw new RangeError(`${spec.name}: joint ${joints[j]?.name} left its range`);
    }
  };

  const self: Follower = {
    spec,
    governor: motion,
    wantedRad,
    targetRad: target,
    limits,
    held,
    clutchRad,
    frame,
    place(poseRad) {
      for (let j = 0; j < n; j++) {
        motion.x[j] = Math.min(Math.max(poseRad[j] as number, min[j] as number), max[j] as number);
        motion.v[j] = 0;
      }
      self.settleHere();
    },
    settleHere() {
      target.set(motion.x);
      // With the clutch out the wish stays what it is.
      wantedRad.set(motion.x);
    },
    want(leaderRad, clutched) {
      map.mix(leaderRad, mixed);
      tip?.reach(leaderRad, mixed);
      for (let j = 0; j < n; j++) {
        if (held[j] === 1) wantedRad[j] = target[j] as number;
        else if (clutched) clutchRad[j] = (wantedRad[j] as number) - (mixed[j] as number);
        else wantedRad[j] = (mixed[j] as number) + (clutchRad[j] as number);
      }
      map.settle(wantedRad, target, clipped);
      motion.targetSpeed.fill(0);
      wishing = true;
      noteLimits();
    },
    match(leaderRad, leaderRadS) {
      map.mix(leaderRad, mixed);
      map.mixSpeed(leaderRadS, motion.targetSpeed);
      if (tip !== null) {
        // How fast the solved joints will move is not known: they follow with the governor's lag.
        tip.reach(leaderRad, mixed);
        for (let j = 0; j < n; j++) if (tip.reaches[j] === 1) motion.targetSpeed[j] = 0;
      }
      for (let j = 0; j < n; j++) {
        const wish = held[j] === 1 ? (target[j] as number) : (mixed[j] as number) + (clutchRad[j] as number);
        wantedRad[j] = wish;
        target[j] = Math.min(Math.max(wish, min[j] as number), max[j] as number);
        clipped[j] = target[j] === wish ? 0 : 1;
        if (clipped[j] === 1) motion.targetSpeed[j] = 0;
      }
      wishing = true;
      noteLimits();
    },
    wantRest() {
      wantedRad.set(rest);
      target.set(rest);
      motion.targetSpeed.fill(0);
      wishing = false;
      limits.fill(0);
      motion.braking.fill(0);
    },
    limitSpeed(share, together) {
      const s = share[0] as number;
      gentle = together;
      if (!together) {
        for (let j = 0; j < n; j++) motion.speed[j] = s * (top[j] as number);
        return;
      }
      let longestS = 0;
      for (let j = 0; j < n; j++) {
        const away = Math.abs((target[j] as number) - (motion.x[j] as number));
        if (held[j] === 0) longestS = Math.max(longestS, away / (top[j] as number));
      }
      for (let j = 0; j < n; j++) {
        const away = Math.abs((target[j] as number) - (motion.x[j] as number)) + CLOSE_RAD;
        motion.speed[j] = s * (longestS > 0 ? Math.min(top[j] as number, away / longestS) : (top[j] as number));
      }
    },
    step(dtS) {
      let reason = 0;
      if (whole === null) motion.step(dtS);
      else reason = whole.step(dtS, gentle, wishing);
      check();
      for (let j = 0; j < n; j++) {
        if (reason !== 0 && motion.x[j] !== target[j]) limits[j] = (limits[j] as number) | reason;
        const atLimit = motion.v[j] !== 0 && Math.abs(motion.v[j] as number) >= AT_LIMIT * (motion.speed[j] as number);
        if (atLimit && motion.braking[j] === 0) limits[j] = (limits[j] as number) | LIMITS.speed;
      }
      gears.pulses(motion.x, frame.pulsesUs);
    },
    brake(dtS) {
      // Braking needs no certificate: each step was taken because the arm can brake from it.
      motion.braking.fill(1);
      motion.step(dtS);
      check();
      gears.pulses(motion.x, frame.pulsesUs);
    },
    aim() {
      gears.pulses(motion.x, frame.pulsesUs);
    },
    hold(health) {
      let freed = false;
      for (let j = 0; j < n; j++) {
        const sick = (feeds[j] as readonly number[]).some((i) => health[i] !== 0);
        if (held[j] === 1 && !sick) freed = true;
        held[j] = sick ? 1 : 0;
      }
      return freed;
    },
    atRest() {
      for (let j = 0; j < n; j++) {
        if (Math.abs((motion.x[j] as number) - (rest[j] as number)) > ROUNDING_RAD) return false;
      }
      return true;
    },
    near(withinRad, lagging) {
      for (let j = 0; j < n; j++) {
        if (held[j] === 1) continue;
        const v = motion.v[j] as number;
        // Stopped short by a keep-out or a load, it is as near as it will be.
        if (((limits[j] as number) & STOPPED_SHORT) !== 0 && Math.abs(v) < STANDING_RAD_S) continue;
        const lag = lagging ? (0.5 * v * v) / (motion.accel[j] as number) : 0;
        if (Math.abs((target[j] as number) - (motion.x[j] as number)) > withinRad + lag) return false;
      }
      return true;
    },
    passed(withinRad) {
      for (let j = 0; j < n; j++) {
        if (held[j] === 1 || (joints[j] as FollowerJointSpec).sources.length === 0) continue;
        if (Math.abs((target[j] as number) - (motion.x[j] as number)) > withinRad) return false;
      }
      return true;
    },
  };
  self.place(rest);
  self.aim();
  return self;
}

/** The leader joints that a joint depends on: its sources, and for one that reaches for the tip the leader's whole arm. */
function feedsOf(joint: FollowerJointSpec, tip: TipSpec | null | undefined): readonly number[] {
  const sources = joint.sources.map((source) => source.joint);
  return tip ? [...sources, ...tip.leader.links.map((link) => link.joint)] : sources;
}
