import type { ArmSpec, KeepOut, Vec3 } from '../arm/spec.ts';
import type { PointMap } from '../map/points.ts';

/** A follower as the kernels need it: radians, integer microseconds, pulses in microseconds. Compiled from a profile. */
export interface FollowerSpec {
  readonly name: string;
  /** 1 / rate_hz. */
  readonly periodUs: number;
  readonly joints: readonly FollowerJointSpec[];
  readonly servos: readonly ServoSpec[];
  /** Share of the speed limits while joining, 0 to 1. */
  readonly joinShare: number;
  readonly joinMeet: 'move' | 'wait';
  readonly wake: 'ask' | 'rest' | 'last';
  readonly stopCategory: 0 | 1 | 2;
  /** A board output switches the arm's power. */
  readonly hasPower: boolean;
  readonly onLostPulse: 'limp' | 'hold' | 'unknown';
  /** Named poses, in joint order, radians; joints a pose leaves out stand at rest. */
  readonly poses: ReadonlyMap<string, Float64Array>;
  /** Its geometry and what the whole arm has to keep; absent: joints are driven one by one. */
  readonly whole?: WholeArmSpec;
}

/** What only the arm as a whole can keep. */
export interface WholeArmSpec {
  readonly arm: ArmSpec;
  /** Cap on the speed of every link end, m/s; null: none. */
  readonly endSpeedMS: number | null;
  readonly keepOut: readonly KeepOut[];
  /** Motions that raise a load over what its motor may hold are refused, not only told. */
  readonly limitLoad: boolean;
  /** Accelerations are lowered, while speeding up, to what the motors can give. */
  readonly limitAccel: boolean;
  /** The tip copies the leader's tip, instead of joint copying joint; null: joints. */
  readonly tip: TipSpec | null;
}

/** How the leader's tip becomes the follower's. */
export interface TipSpec {
  /** The leader's geometry. */
  readonly leader: ArmSpec;
  /** Follower lengths for one of the leader's. */
  readonly scale: number;
  /** Moves the follower's copy, metres, in its own level frame. */
  readonly originM: Vec3;
  /** Left and right change places. */
  readonly mirror: boolean;
  /** Turns the copy about the vertical, radians. */
  readonly turnRad: number;
  /** The last link keeps the pitch of the leader's last link, where a joint is free for it. */
  readonly keepPitch: boolean;
  /** Joints, by index, that reach for the tip; the others copy joints. */
  readonly reaching: readonly number[];
}

export interface FollowerJointSpec {
  readonly name: string;
  /** Leader joints by index with their weights; empty: the joint stays at rest. */
  readonly sources: readonly WeightedSource[];
  /** Signed: direction times gain (and what `stretch` made of them). */
  readonly gain: number;
  readonly offsetRad: number;
  readonly minRad: number;
  readonly maxRad: number;
  readonly deadbandRad: number;
  readonly speedRadS: number;
  readonly accelRadS2: number;
  readonly restRad: number;
}

export interface WeightedSource {
  /** Index of the leader's (or, in `ServoSpec.turns`, the follower's) joint. */
  readonly joint: number;
  readonly weight: number;
}

export interface ServoSpec {
  readonly channel: number;
  /** The servo's angle is the weighted sum of these joints. */
  readonly turns: readonly WeightedSource[];
  /** Radians to microseconds, never beyond the outer points. */
  readonly map: PointMap;
  readonly deadbandUs: number;
}
