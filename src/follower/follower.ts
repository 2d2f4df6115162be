import type { Frame } from '../wire/types.ts';
import { burden, type Burden } from './burden.ts';
import { type Governor, type Governors, governors } from './governor.ts';
import { type Outcome, outcome } from './outcome.ts';
import { LIMITS } from './reasons.ts';
import { type Remap, remap } from './remap.ts';
import { type Rows, rowsOf } from './rows.ts';
import { type Servos, servos } from './servos.ts';
import type { FollowerJointSpec, FollowerSpec, TipSpec } from './spec.ts';
import { type SpeedLimits, speedLimits } from './speed-limits.ts';
import { tipWish } from './tip-wish.ts';
import { wholeArm } from './whole-arm.ts';
import { type Wish, wish } from './wish.ts';

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
  /** What it carries; null where its geometry is not known. */
  readonly burden: Burden | null;
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
  /**
   * Takes angles of its own instead of a leader's pose, and the speeds that go with them: no deadband, inside the range,
   * and followed without lag where the limits allow. `clutched` as in `want`.
   */
  pursue(anglesRad: Float64Array, speedsRadS: Float64Array, clutched: boolean): void;
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

/** An arm this near its rest pose is there, radians. */
const ROUNDING_RAD = 1e-9;
const STOPPED_SHORT = LIMITS.keep_out | LIMITS.load;
/** Slower than this a joint stands, rad/s. */
const STANDING_RAD_S = 1e-3;
/** A tip target left this far away is out of reach, metres. */
const OUT_OF_REACH_M = 0.001;

/** What is made for all arms together: see `rows.ts`. */
interface Kernels {
  readonly motions: Governors;
  readonly map: Remap;
  readonly wishes: Wish;
  readonly speeds: SpeedLimits;
  readonly came: Outcome;
  readonly gears: Servos;
}

/** The followers of one drive. */
export function followers(specs: readonly FollowerSpec[]): readonly Follower[] {
  const rows = rowsOf(specs.map((spec) => spec.joints.length));
  const servoRows = rowsOf(specs.map((spec) => spec.servos.length));
  const motions = governors(specs.map((spec) => spec.joints));
  const map = remap(specs);
  const wishes = wish(specs, motions.all, map.askedRad);
  const kernels = {
    motions,
    map,
    wishes,
    speeds: speedLimits(specs, motions.all, wishes.held),
    came: outcome(specs, motions.all, wishes.limits),
    gears: servos(specs, motions.all.x),
  };
  return specs.map((spec, f) =>
    follower(spec, motions.each[f] as Governor, rows[f] as Rows, servoRows[f] as Rows, kernels),
  );
}

function follower(spec: FollowerSpec, motion: Governor, rows: Rows, servoRows: Rows, kernels: Kernels): Follower {
  const { motions, map, wishes, speeds, came, gears } = kernels;
  const joints = spec.joints;
  const n = joints.length;
  const tip = spec.whole?.tip ? tipWish(spec.whole, spec.whole.tip, joints) : null;
  const feeds = joints.map((joint, j) => feedsOf(joint, tip?.reaches[j] === 1 ? spec.whole?.tip : null));
  const whole = spec.whole === undefined ? null : wholeArm(spec.whole, motion);
  const load = spec.whole === undefined ? null : burden(spec.whole.arm, n);
  const rest = Float64Array.from(joints, (j) => j.restRad);
  const min = Float64Array.from(joints, (j) => j.minRad);
  const max = Float64Array.from(joints, (j) => j.maxRad);
  const askedRad = map.askedRad.subarray(rows.from, rows.to);
  const wantedRad = wishes.wantedRad.subarray(rows.from, rows.to);
  const clutchRad = wishes.clutchRad.subarray(rows.from, rows.to);
  const held = wishes.held.subarray(rows.from, rows.to);
  const limits = wishes.limits.subarray(rows.from, rows.to);
  const frame: Frame = {
    pulsesUs: gears.pulsesUs.subarray(servoRows.from, servoRows.to),
    sentUs: new Float64Array(spec.servos.length),
    anglesRad: motion.x,
    pulsing: 0,
  };
  const target = motion.target;
  /** Nobody leads the motion (joining, parking): link ends keep to a gentle speed. */
  let gentle = false;
  /** The motion is a wish, and may be refused for its load; going home may not. */
  let wishing = false;

  /** Says of the joints that reach for the tip that they cannot. */
  const noteReach = (): void => {
    if (tip === null || !((tip.leftM[0] as number) > OUT_OF_REACH_M)) return;
    for (let j = 0; j < n; j++) if (tip.reaches[j] === 1) limits[j] = (limits[j] as number) | LIMITS.reach;
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
    burden: load,
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
      map.mix(rows, leaderRad);
      tip?.reach(leaderRad, askedRad);
      wishes.settle(rows, clutched);
      noteReach();
      wishing = true;
    },
    match(leaderRad, leaderRadS) {
      map.mix(rows, leaderRad);
      map.mixSpeed(rows, leaderRadS, motion.targetSpeed);
      if (tip !== null) {
        // How fast the solved joints will move is not known: they follow with the governor's lag.
        tip.reach(leaderRad, askedRad);
        for (let j = 0; j < n; j++) if (tip.reaches[j] === 1) motion.targetSpeed[j] = 0;
      }
      wishes.match(rows);
      noteReach();
      wishing = true;
    },
    pursue(anglesRad, speedsRadS, clutched) {
      wishes.pursue(rows, anglesRad, speedsRadS, clutched);
      wishing = true;
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
      gentle = together;
      if (together) speeds.together(rows, share);
      else speeds.open(rows, share);
    },
    step(dtS) {
      let reason = 0;
      if (whole === null) motions.step(rows, dtS);
      else reason = whole.step(dtS, gentle, wishing);
      came.note(rows, spec, reason);
      gears.turn(servoRows);
    },
    brake(dtS) {
      // Braking needs no certificate: each step was taken because the arm can brake from it.
      motion.braking.fill(1);
      motions.step(rows, dtS);
      came.check(rows, spec);
      gears.turn(servoRows);
    },
    aim() {
      gears.turn(servoRows);
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
