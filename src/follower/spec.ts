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
