import { type Rows, rowsOf } from './rows.ts';
import type { FollowerSpec } from './spec.ts';
import { weightedSums } from './weighted.ts';

/** Leader pose to the angles a follower is asked for, before clutch, deadband and range. */
export interface Remap {
  /** What the last pose came to, radians. */
  readonly askedRad: Float64Array;
  /** askedRad[j] = gain_j sum_i weight_ji leader_i + offset_j; a joint without sources stays at rest. */
  mix(leaderRad: Float64Array): void;
  /** The same for speeds, rad/s: no offset, and a joint without sources stands. */
  mixSpeed(leaderRadS: Float64Array, askedRadS: Float64Array): void;
}

/** Remaps of several arms, and the table that holds what all are asked for, arm after arm. */
export interface Remaps {
  readonly each: readonly Remap[];
  readonly askedRad: Float64Array;
}

export function remap(spec: FollowerSpec): Remap {
  return remaps([spec]).each[0] as Remap;
}

export function remaps(specs: readonly FollowerSpec[]): Remaps {
  const joints = specs.flatMap((spec) => spec.joints);
  const offset = Float64Array.from(joints, (j) => (j.sources.length === 0 ? j.restRad : j.offsetRad));
  const asked = Float64Array.from(joints, (j) => j.restRad);
  const copied = weightedSums(
    joints.map((j) => j.sources.map(({ joint, weight: w }) => ({ joint, weight: j.gain * w }))),
  );
  const mix = (rows: Rows, leader: Float64Array): void => {
    for (let r = rows.from; r < rows.to; r++) asked[r] = copied.sum(r, offset[r] as number, leader);
  };
  const mixSpeed = (rows: Rows, leader: Float64Array, out: Float64Array): void => {
    for (let r = rows.from; r < rows.to; r++) out[r - rows.from] = copied.sum(r, 0, leader);
  };
  const each = rowsOf(specs.map((spec) => spec.joints.length)).map(
    (rows): Remap => ({
      askedRad: asked.subarray(rows.from, rows.to),
      mix: (leaderRad) => mix(rows, leaderRad),
      mixSpeed: (leaderRadS, askedRadS) => mixSpeed(rows, leaderRadS, askedRadS),
    }),
  );
  return { each, askedRad: asked };
}
