import { pointMasses } from './bodies.ts';
import { chain as makeChain, timesInto } from './chain.ts';
import type { ArmSpec } from './spec.ts';

/** What a moving arm does to its base: the masses beyond it as points, and how they push back. */
export interface Reaction {
  /** Without the base, kilograms. */
  readonly massKg: number;
  /** First moment of mass in the level frame, kilogram metres: 3 values. */
  readonly momentKgM: Float64Array;
  /** Poses the arm. */
  pose(anglesRad: Float64Array): void;
  /**
   * The lowest value, 0 or below, that a sum over all masses may take while every joint accelerates and turns as it
   * may at the present pose. A joint's own speed gives one sign only, the products of two speeds both: each is taken
   * the worse way, which seldom comes together.
   * @param of what is summed, linear in a mass's acceleration times mass, and in the moment of that about the origin
   */
  least(of: Push): number;
}

/** Value for a push (x, y, z) in newtons, with its moment (mx, my, mz) about the level frame's origin. */
export type Push = (x: number, y: number, z: number, mx: number, my: number, mz: number) => number;

/** How fast and how hard each joint of the profile may move. */
export interface MotionBounds {
  readonly speedRadS: ArrayLike<number>;
  readonly accelRadS2: ArrayLike<number>;
}

/** A push and its moment, 6 values each. */
const WRENCH = 6;

export function reaction(spec: ArmSpec, { speedRadS, accelRadS2 }: MotionBounds): Reaction {
  const chain = makeChain(spec);
  const { links, joint, at, turn, axis } = chain;
  const masses = pointMasses(spec).map((mass) => ({ ...mass, local: Float64Array.from(mass.atM) }));
  const point = new Float64Array(3);
  const jacobian = new Float64Array(3 * links);
  const sum = new Float64Array(3);
  /** For one rad/s^2 of each joint, and for the product of the speeds of joints b <= c at b links + c. */
  const speeding = new Float64Array(WRENCH * links);
  const turning = new Float64Array(WRENCH * links * links);

  /** Adds a mass at `point` that accelerates by (x, y, z). */
  const add = (to: Float64Array, o: number, kg: number, x: number, y: number, z: number): void => {
    const px = point[0] as number;
    const py = point[1] as number;
    const pz = point[2] as number;
    to[o] = (to[o] as number) + kg * x;
    to[o + 1] = (to[o + 1] as number) + kg * y;
    to[o + 2] = (to[o + 2] as number) + kg * z;
    to[o + 3] = (to[o + 3] as number) + kg * (py * z - pz * y);
    to[o + 4] = (to[o + 4] as number) + kg * (pz * x - px * z);
    to[o + 5] = (to[o + 5] as number) + kg * (px * y - py * x);
  };

  /** A point accelerates by the sums of J_c q''_c and of (a_b x J_c) q'_b q'_c, b being the inner of two joints. */
  const addMass = (link: number, kg: number): void => {
    chain.jacobian(point, 0, link, jacobian);
    for (let c = 0; c <= link; c++) {
      const x = jacobian[3 * c] as number;
      const y = jacobian[3 * c + 1] as number;
      const z = jacobian[3 * c + 2] as number;
      add(speeding, WRENCH * c, kg, x, y, z);
      for (let b = 0; b <= c; b++) {
        const ax = axis[3 * b] as number;
        const ay = axis[3 * b + 1] as number;
        const az = axis[3 * b + 2] as number;
        add(turning, WRENCH * (b * links + c), kg, ay * z - az * y, az * x - ax * z, ax * y - ay * x);
      }
    }
  };

  const value = (of: Push, from: Float64Array, o: number): number =>
    of(
      from[o] as number,
      from[o + 1] as number,
      from[o + 2] as number,
      from[o + 3] as number,
      from[o + 4] as number,
      from[o + 5] as number,
    );

  return {
    massKg: masses.reduce((total, { massKg }) => total + massKg, 0),
    momentKgM: sum,
    pose(anglesRad) {
      chain.pose(anglesRad);
      sum.fill(0);
      speeding.fill(0);
      turning.fill(0);
      for (const { link, massKg, local } of masses) {
        timesInto(turn, 9 * link, local, 0, point, 0);
        for (let r = 0; r < 3; r++) {
          point[r] = (point[r] as number) + (at[3 * link + r] as number);
          sum[r] = (sum[r] as number) + massKg * (point[r] as number);
        }
        addMass(link, massKg);
      }
    },
    least(of) {
      let low = 0;
      for (let c = 0; c < links; c++) {
        const jc = joint[c] as number;
        const speed = speedRadS[jc] as number;
        low -= Math.abs(value(of, speeding, WRENCH * c)) * (accelRadS2[jc] as number);
        low += Math.min(0, value(of, turning, WRENCH * (c * links + c))) * speed * speed;
        for (let b = 0; b < c; b++) {
          const both = speed * (speedRadS[joint[b] as number] as number);
          low -= 2 * Math.abs(value(of, turning, WRENCH * (b * links + c))) * both;
        }
      }
      return low;
    },
  };
}
