/**
 * An arm's geometry and masses as the kernels need them: metres, kilograms, newtons, radians. Compiled from `arm:`.
 * Frames are parallel to the base at the zero pose: x forward, y left, z up; turning is right-handed about the axis.
 */
export interface ArmSpec {
  readonly base: BaseSpec;
  /** Base first. A joint of the profile that has no link (a grip) moves nothing here. */
  readonly links: readonly LinkSpec[];
  readonly payload: MassSpec | null;
}

export type Vec3 = readonly [number, number, number];

export interface BaseSpec {
  /** Floor to the first axis, along the level frame's z, metres. */
  readonly heightM: number;
  /** Turned about x, then about y, radians: [pi, 0] hangs the arm from above. */
  readonly tiltRad: readonly [number, number];
  readonly massKg: number | null;
  /** Corners on the floor in the level frame, metres, in order round; null: tipping cannot be told. */
  readonly footprintM: readonly (readonly [number, number])[] | null;
  readonly friction: number | null;
}

export interface LinkSpec {
  /** Index of the joint in the profile. */
  readonly joint: number;
  /** Unit vector of the joint's axis in the link's frame. */
  readonly axis: Vec3;
  /** From this joint's axis to the next one's, or to the tip, in the link's frame at the zero pose. */
  readonly toM: Vec3;
  readonly massKg: number;
  readonly centreM: Vec3;
  readonly counterweight: MassSpec | null;
  readonly spring: SpringSpec | null;
  readonly motor: MotorSpec | null;
  /** Coulomb friction, newton metres. */
  readonly dragNm: number;
  readonly cable: CableSpec | null;
}

/** A point mass: where it is in its link's frame (a payload: from the tip, in the last link's frame). */
export interface MassSpec {
  readonly massKg: number;
  readonly atM: Vec3;
}

/**
 * A coil spring from a point on the link before to a point on this link. For the first link the former is the base,
 * tilted with it, its origin at the first axis. It pulls, and hangs slack when it is shorter than its free length.
 */
export interface SpringSpec {
  readonly nPerM: number;
  /** 0 where a cord over a pulley takes up the spring's own length. */
  readonly freeM: number;
  /** In the frame of the link before. */
  readonly fromM: Vec3;
  /** In this link's frame. */
  readonly toM: Vec3;
}

export interface MotorSpec {
  readonly stallNm: number;
  /** Shares of the stall torque that may be used: moving, and held. */
  readonly use: number;
  readonly holdUse: number;
  readonly stallA: number | null;
}

/** A cable that winds up: torque proportional to the angle away from where it is free. */
export interface CableSpec {
  readonly nmPerRad: number;
  readonly freeRad: number;
}

/** Where no part of the arm may be, in the base's level frame, metres. */
export type KeepOut =
  | { readonly kind: 'below'; readonly zM: number }
  | { readonly kind: 'box'; readonly minM: Vec3; readonly maxM: Vec3 };
