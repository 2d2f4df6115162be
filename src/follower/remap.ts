import type { Rows } from './rows.ts';
import type { FollowerSpec } from './spec.ts';
import { weightedSums } from './weighted.ts';

/** A leader's pose to the angles that followers are asked for, before clutch, deadband and range. */
export interface Remap {
  /** What the last poses came to, radians, arm after arm. */
  readonly askedRad: Float64Array;
  /** askedRad[j] = gain_j sum_i weight_ji leader_i + offset_j; a joint without sources stays at rest. */
  mix(rows: Rows, leaderRad: Float64Array): void;
  /** The same for one arm's speeds, rad/s: no offset, and a joint without sources stands. */
  mixSpeed(rows: Rows, leaderRadS: Float64Array, askedRadS: Float64Array): void;
}

/** @param specs each arm has its own rows, see `rows.ts` */
export function remap(specs: readonly FollowerSpec[]): Remap {
  const joints = specs.flatMap((spec) => spec.joints);
  const offset = Float64Array.from(joints, (j) => (j.sources.length === 0 ? j.restRad : j.offsetRad));
  const askedRad = Float64Array.from(joints, (j) => j.restRad);
  const copied = weightedSums(
    joints.map((j) => j.sources.map(({ joint, weight }) => ({ joint, weight: j.gain * weight }))),
  );
  return {
    askedRad,
    mix({ from, to }, leaderRad) {
      for (let r = from; r < to; r++) askedRad[r] = copied.sum(r, offset[r] as number, leaderRad);
    },
    mixSpeed({ from, to }, leaderRadS, askedRadS) {
      for (let r = from; r < to; r++) askedRadS[r - from] = copied.sum(r, 0, leaderRadS);
    },
  };
}
