import type { Chain } from './chain.ts';
import { reachM } from './extent.ts';
import { type Pitch, pitchOf } from './pitch.ts';
import type { LinkSpec } from './spec.ts';

/**
 * The tip of a chain as a function of some of its joints, in shares of the arm's reach: where it is, how it moves, and
 * how that bends. Joints are counted as they move: column c is joint `joints[c]` of the profile.
 */
export interface TipMotion {
  readonly chain: Chain;
  readonly reachM: number;
  /** Profile joints that move the tip, base first. */
  readonly joints: Uint8Array;
  /** From the tip to the target, shares of the reach; 3 values. */
  readonly error: Float64Array;
  /** Column c at [3c..3c+2]: geometric Jacobian of the tip, shares of the reach a radian. */
  readonly jacobian: Float64Array;
  readonly pitch: Pitch;
  /** Poses the chain and fills `error`. */
  look(anglesRad: Float64Array, targetM: Float64Array): void;
  /** Fills `jacobian` at the present pose. */
  slopes(): void;
  /**
   * out[c size + b] (c >= b) = J'J - along . d2p/dq2. Along the error it is the second derivative of half the squared
   * distance to the target; along 0 it is Gauss and Newton's J'J, which is never negative.
   * With axes a, d2p / dq_i dq_j = a_i x J_j for link i before link j.
   */
  bend(along: Float64Array, out: Float64Array, size: number): void;
}

/** @param moves joints of the profile, by index; those that have no link are left out */
export function tipMotion(chain: Chain, moves: readonly number[]): TipMotion {
  const { spec, at, axis } = chain;
  const links = Uint8Array.from(spec.links.flatMap((link, i) => (moves.includes(link.joint) ? [i] : [])));
  const joints = Uint8Array.from(links, (i) => (spec.links[i] as LinkSpec).joint);
  const m = joints.length;
  const reach = reachM(spec);
  const tip = 3 * chain.links;
  const error = new Float64Array(3);
  const jacobian = new Float64Array(3 * m);

  return {
    chain,
    reachM: reach,
    joints,
    error,
    jacobian,
    pitch: pitchOf(chain, links),
    look(anglesRad, targetM) {
      chain.pose(anglesRad);
      for (let k = 0; k < 3; k++) error[k] = ((targetM[k] as number) - (at[tip + k] as number)) / reach;
    },
    slopes() {
      for (let c = 0; c < m; c++) {
        const a = 3 * (links[c] as number);
        const rx = ((at[tip] as number) - (at[a] as number)) / reach;
        const ry = ((at[tip + 1] as number) - (at[a + 1] as number)) / reach;
        const rz = ((at[tip + 2] as number) - (at[a + 2] as number)) / reach;
        const ax = axis[a] as number;
        const ay = axis[a + 1] as number;
        const az = axis[a + 2] as number;
        jacobian[3 * c] = ay * rz - az * ry;
        jacobian[3 * c + 1] = az * rx - ax * rz;
        jacobian[3 * c + 2] = ax * ry - ay * rx;
      }
    },
    bend(along, out, size) {
      const ex = along[0] as number;
      const ey = along[1] as number;
      const ez = along[2] as number;
      for (let b = 0; b < m; b++) {
        const a = 3 * (links[b] as number);
        const ax = axis[a] as number;
        const ay = axis[a + 1] as number;
        const az = axis[a + 2] as number;
        // J_b . J_c - e . (a_b x J_c) = (J_b - e x a_b) . J_c for c at b or beyond.
        const x = (jacobian[3 * b] as number) - (ey * az - ez * ay);
        const y = (jacobian[3 * b + 1] as number) - (ez * ax - ex * az);
        const z = (jacobian[3 * b + 2] as number) - (ex * ay - ey * ax);
        for (let c = b; c < m; c++) {
          out[c * size + b] =
            x * (jacobian[3 * c] as number) + y * (jacobian[3 * c + 1] as number) + z * (jacobian[3 * c + 2] as number);
        }
      }
    },
  };
}
