import { type Rows, rowsOf } from './rows.ts';
import type { FollowerSpec } from './spec.ts';
import { weightedSums } from './weighted.ts';

/** Leader pose to the angles a follower is asked for, before clutch, deadband and range. */
export interface Remap {
  /** asked[j] = gain_j sum_i weight_ji leader_i + offset_j, radians; a joint without sources stays at rest. */
  mix(leaderRad: Float64Array, asked: Float64Array): void;
  /** The same for speeds, rad/s: no offset, and a joint without sources stands. */
  mixSpeed(leaderRadS: Float64Array, askedRadS: Float64Array): void;
}

export function remap(spec: FollowerSpec): Remap {
  return remaps([spec])[0] as Remap;
}

export function remaps(specs: readonly FollowerSpec[]): readonly Remap[] {
  const joints = specs.flatMap((spec) => spec.joints);
  const offset = Float64Array.from(joints, (j) => (j.sources.length === 0 ? j.restRad : j.offsetRad));
  const none = new Float64Array(joints.length);
  const { first, from, weight } = weightedSums(
    joints.map((j) => j.sources.map(({ joint, weight: w }) => ({ joint, weight: j.gain * w }))),
  );
  const mixOnto = (base: Float64Array, rows: Rows, leader: Float64Array, out: Float64Array): void => {
    for (let r = rows.from; r < rows.to; r++) {
      let sum = base[r] as number;
      for (let t = first[r] as number; t < (first[r + 1] as number); t++)
        sum += (weight[t] as number) * (leader[from[t] as number] as number);
      out[r - rows.from] = sum;
    }
  };
  return rowsOf(specs.map((spec) => spec.joints.length)).map((rows) => ({
    mix: (leaderRad, asked) => mixOnto(offset, rows, leaderRad, asked),
    mixSpeed: (leaderRadS, askedRadS) => mixOnto(none, rows, leaderRadS, askedRadS),
  }));
}
