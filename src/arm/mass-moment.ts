import { bodies } from './bodies.ts';
import { chain as makeChain, timesInto } from './chain.ts';
import { smallestCircle } from './circle.ts';
import type { ArmSpec, LinkSpec, Vec3 } from './spec.ts';

/** First moment of mass across a joint's axis, kilogram metres, in the frame of the joint's link. */
export interface MassMoment {
  /** The middle of all it can be: the centre of the smallest circle around it. A weight opposite to it balances best. */
  readonly middleKgM: Vec3;
  /** How far from the middle it can get, kilogram metres: times g, the torque that no weight on this link can cancel. */
  readonly strayKgM: number;
}

/** Poses looked at, and how closely one joint is. */
const POSES = 4096;
const LEVELS_MAX = 13;
/** A whole root may come out a little below. */
const ROUNDING = 1e-9;

/**
 * What link `link` and everything beyond it weighs across the link's axis, while the joints beyond go over their ranges.
 * @param specs the same arm with different payloads
 * @param minRad ranges in joint order, radians
 */
export function massMoment(
  specs: readonly ArmSpec[],
  link: number,
  minRad: ArrayLike<number>,
  maxRad: ArrayLike<number>,
): MassMoment {
  const { axis } = (specs[0] as ArmSpec).links[link] as LinkSpec;
  const [u, v] = across(axis);
  const points = Float64Array.from(specs.flatMap((spec) => momentsOf(spec, link, u, v, minRad, maxRad)));
  const { x, y, radius } = smallestCircle(points);
  return {
    middleKgM: [x * u[0] + y * v[0], x * u[1] + y * v[1], x * u[2] + y * v[2]],
    strayKgM: radius,
  };
}

/** Two unit vectors at right angles to an axis and to each other. */
function across(axis: Vec3): readonly [Vec3, Vec3] {
  const least = axis.reduce((a, value, k) => (Math.abs(value) < Math.abs(axis[a] as number) ? k : a), 0);
  const other: Vec3 = [least === 0 ? 1 : 0, least === 1 ? 1 : 0, least === 2 ? 1 : 0];
  const first = cross(axis, other);
  const size = Math.hypot(...first);
  const u: Vec3 = [first[0] / size, first[1] / size, first[2] / size];
  return [u, cross(axis, u)];
}

function cross([ax, ay, az]: Vec3, [bx, by, bz]: Vec3): Vec3 {
  return [ay * bz - az * by, az * bx - ax * bz, ax * by - ay * bx];
}

/** Components along u and v, in turn, of the moment at every pose of a grid over the joints beyond the link. */
function momentsOf(
  spec: ArmSpec,
  link: number,
  u: Vec3,
  v: Vec3,
  minRad: ArrayLike<number>,
  maxRad: ArrayLike<number>,
): number[] {
  const chain = makeChain(spec);
  const { links, at, turn } = chain;
  const { massKg, momentKgM } = bodies(spec);
  const beyond = spec.links.slice(link + 1).map(({ joint }) => joint);
  const levels = Math.min(LEVELS_MAX, Math.max(2, Math.floor(POSES ** (1 / Math.max(1, beyond.length)) + ROUNDING)));
  const pose = Float64Array.from(minRad, (low, j) => 0.5 * (low + (maxRad[j] as number)));
  const world = new Float64Array(3);
  const own = new Float64Array(3);
  const found: number[] = [];
  for (let n = 0; n < levels ** beyond.length; n++) {
    let digits = n;
    for (const j of beyond) {
      const low = minRad[j] as number;
      pose[j] = low + ((maxRad[j] as number) - low) * ((digits % levels) / (levels - 1));
      digits = Math.floor(digits / levels);
    }
    chain.pose(pose);
    world.fill(0);
    for (let i = link; i < links; i++) {
      timesInto(turn, 9 * i, momentKgM, 3 * i, own, 0);
      for (let r = 0; r < 3; r++) {
        const lever = (at[3 * i + r] as number) - (at[3 * link + r] as number);
        world[r] = (world[r] as number) + (massKg[i] as number) * lever + (own[r] as number);
      }
    }
    let alongU = 0;
    let alongV = 0;
    for (let r = 0; r < 3; r++) {
      const row = turn.subarray(9 * link + 3 * r, 9 * link + 3 * r + 3) as unknown as Vec3;
      alongU += (world[r] as number) * (row[0] * u[0] + row[1] * u[1] + row[2] * u[2]);
      alongV += (world[r] as number) * (row[0] * v[0] + row[1] * v[1] + row[2] * v[2]);
    }
    found.push(alongU, alongV);
  }
  return found;
}
