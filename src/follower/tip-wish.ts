import { baseTurn, chain } from '../arm/chain.ts';
import { inverse } from '../arm/inverse.ts';
import type { FollowerJointSpec, TipSpec, WholeArmSpec } from './spec.ts';

/** The wish of an arm whose tip copies the leader's tip: joint angles that bring it there, or as near as it reaches. */
export interface TipWish {
  /** 1 for each joint that reaches for the tip. */
  readonly reaches: Uint8Array;
  /** What the last wish leaves between the tip and its target, metres. */
  readonly leftM: Float64Array;
  /**
   * Puts the reaching joints of `wanted` to the angles that reach; they come in as the joint-mode pose, toward which
   * spare joints settle. A leader angle that is not known (NaN) leaves them as they are.
   */
  reach(leaderRad: Float64Array, wanted: Float64Array): void;
}

/**
 * The leader's tip, seen from its own base, is scaled, mirrored and turned, and laid out from the follower's base: what
 * is up from a standing leader is down from a hung follower, as it is when joint copies joint.
 */
export function tipWish(spec: WholeArmSpec, tip: TipSpec, joints: readonly FollowerJointSpec[]): TipWish {
  const minRad = Float64Array.from(joints, (j) => j.minRad);
  const maxRad = Float64Array.from(joints, (j) => j.maxRad);
  const solver = inverse(spec.arm, { minRad, maxRad, moves: tip.reaching });
  const leader = chain(tip.leader);
  const links = tip.leader.links.length;
  const leaderBase = baseTurn(tip.leader.base.tiltRad);
  const base = baseTurn(spec.arm.base.tiltRad);
  const cos = Math.cos(tip.turnRad);
  const sin = Math.sin(tip.turnRad);
  const side = tip.mirror ? -1 : 1;
  const answer = Float64Array.from(joints, (j) => j.restRad);
  const target = new Float64Array(3);
  const along = new Float64Array(3);
  const reaches = Uint8Array.from(joints, (_, j) => (tip.reaching.includes(j) ? 1 : 0));

  /** out = scale x the vector from leader place `from` to `to`, carried over from base to base. */
  const carry = (from: number, to: number, scale: number, out: Float64Array): void => {
    const x = (leader.at[3 * to] as number) - (leader.at[3 * from] as number);
    const y = (leader.at[3 * to + 1] as number) - (leader.at[3 * from + 1] as number);
    const z = (leader.at[3 * to + 2] as number) - (leader.at[3 * from + 2] as number);
    // Into the leader's base: its turn, transposed.
    const bx = dot(leaderBase, 0, 3, x, y, z);
    const by = side * dot(leaderBase, 1, 3, x, y, z);
    const bz = dot(leaderBase, 2, 3, x, y, z);
    const tx = scale * (cos * bx - sin * by);
    const ty = scale * (sin * bx + cos * by);
    for (let row = 0; row < 3; row++) out[row] = dot(base, 3 * row, 1, tx, ty, scale * bz);
  };

  const known = (leaderRad: Float64Array): boolean => {
    for (let i = 0; i < links; i++) {
      if (Number.isNaN(leaderRad[tip.leader.links[i]?.joint as number] as number)) return false;
    }
    return true;
  };

  return {
    reaches,
    leftM: solver.leftM,
    reach(leaderRad, wanted) {
      if (!known(leaderRad)) return;
      leader.pose(leaderRad);
      carry(0, links, tip.scale, target);
      target[0] = (target[0] as number) + tip.originM[0];
      target[1] = (target[1] as number) + tip.originM[1];
      target[2] = (target[2] as number) + tip.originM[2] + spec.arm.base.heightM;
      if (tip.keepPitch) {
        carry(links - 1, links, 1, along);
        const length = Math.hypot(along[0] as number, along[1] as number, along[2] as number);
        solver.pitchRad[0] = Math.asin(Math.min(Math.max((along[2] as number) / length, -1), 1));
      }
      solver.solve(target, wanted, answer);
      for (let j = 0; j < reaches.length; j++) if (reaches[j] === 1) wanted[j] = answer[j] as number;
    },
  };
}

/** A row (stride 1) or a column (stride 3) of a 3 by 3 matrix, times a vector. */
function dot(matrix: Float64Array, from: number, stride: number, x: number, y: number, z: number): number {
  return (
    (matrix[from] as number) * x + (matrix[from + stride] as number) * y + (matrix[from + 2 * stride] as number) * z
  );
}
