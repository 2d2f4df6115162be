import type { FollowerSpec } from './spec.ts';

/** Leader pose to the angles a follower is asked for, in two parts so that the clutch can come between them. */
export interface Remap {
  /** wanted[j] = gain_j sum_i weight_ji leader_i + offset_j, radians; a joint without sources stays at rest. */
  mix(leaderRad: Float64Array, wanted: Float64Array): void;
  /** The same for speeds, rad/s: no offset, and a joint without sources stands. */
  mixSpeed(leaderRadS: Float64Array, wantedRadS: Float64Array): void;
  /**
   * Deadband, then range: target[j] trails `wanted[j]` by at most the deadband, without steps (backlash form:
   * target = clamp(previous target, wanted - d, wanted + d)), and stays inside the joint's range.
   * clipped[j] is 1 where the range cut it.
   */
  settle(wanted: Float64Array, target: Float64Array, clipped: Uint8Array): void;
}

export function remap(spec: FollowerSpec): Remap {
  const n = spec.joints.length;
  const first = new Uint16Array(n + 1);
  const source: number[] = [];
  const weight: number[] = [];
  const offset = new Float64Array(n);
  spec.joints.forEach((joint, j) => {
    for (const { joint: i, weight: w } of joint.sources) {
      source.push(i);
      weight.push(joint.gain * w);
    }
    first[j + 1] = source.length;
    offset[j] = joint.sources.length === 0 ? joint.restRad : joint.offsetRad;
  });
  const from = Uint16Array.from(source);
  const scaled = Float64Array.from(weight);
  const deadband = Float64Array.from(spec.joints, (j) => j.deadbandRad);
  const min = Float64Array.from(spec.joints, (j) => j.minRad);
  const max = Float64Array.from(spec.joints, (j) => j.maxRad);
  const none = new Float64Array(n);
  const mixOnto = (base: Float64Array, leader: Float64Array, out: Float64Array): void => {
    for (let j = 0; j < n; j++) {
      let sum = base[j] as number;
      for (let k = first[j] as number; k < (first[j + 1] as number); k++)
        sum += (scaled[k] as number) * (leader[from[k] as number] as number);
      out[j] = sum;
    }
  };
  return {
    mix: (leaderRad, wanted) => mixOnto(offset, leaderRad, wanted),
    mixSpeed: (leaderRadS, wantedRadS) => mixOnto(none, leaderRadS, wantedRadS),
    settle(wanted, target, clipped) {
      for (let j = 0; j < n; j++) {
        const want = wanted[j] as number;
        const d = deadband[j] as number;
        const trailing = Math.min(Math.max(target[j] as number, want - d), want + d);
        const low = min[j] as number;
        const high = max[j] as number;
        target[j] = trailing < low ? low : trailing > high ? high : trailing;
        clipped[j] = trailing < low || trailing > high ? 1 : 0;
      }
    },
  };
}
