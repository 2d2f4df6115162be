import type { Chain } from './chain.ts';
import { leversM } from './extent.ts';

/**
 * How far a small motion of an arm's joints can take it: what bounds a link end's place and velocity between two looks.
 * With W, W' the sums of joint speeds and accelerations, and S, S' the same sums with each joint's longest lever, a link
 * end's place bends by |p''| <= S' + W S and its velocity by |p'''| <= 2 W S' + (3/2 W^2 + W') S; and what is bent by M
 * lies no further than M h^2 / 8 beside the straight line over a time h.
 */
export interface StepBounds {
  /** out[i] = sum over the joints with a link: W for joint speeds, an angle for joint turns. */
  turnInto(by: Float64Array, out: Float64Array, i: number): void;
  /** out[k] = most that link end k moves for these joint speeds or turns: S. It grows with k. */
  reachInto(by: Float64Array, out: Float64Array): void;
  /** out[j] = b - a. */
  differ(a: Float64Array, b: Float64Array, out: Float64Array): void;
  /** out[j] = how far joint j turns on the way from a by b to c, whichever way round. */
  wayInto(a: Float64Array, b: Float64Array, c: Float64Array, out: Float64Array): void;
}

export function stepBounds({ spec, links, joint }: Chain, joints: number): StepBounds {
  const ends = links + 1;
  const levers = leversM(spec);
  return {
    turnInto(by, out, i) {
      let sum = 0;
      for (let k = 0; k < links; k++) sum += Math.abs(by[joint[k] as number] as number);
      out[i] = sum;
    },
    reachInto(by, out) {
      out.fill(0);
      for (let i = 0; i < links; i++) {
        const most = Math.abs(by[joint[i] as number] as number);
        for (let k = i + 1; k < ends; k++) out[k] = (out[k] as number) + (levers[i * ends + k] as number) * most;
      }
    },
    differ(a, b, out) {
      for (let j = 0; j < joints; j++) out[j] = (b[j] as number) - (a[j] as number);
    },
    wayInto(a, b, c, out) {
      for (let j = 0; j < joints; j++) {
        const at = b[j] as number;
        out[j] = Math.abs(at - (a[j] as number)) + Math.abs((c[j] as number) - at);
      }
    },
  };
}
