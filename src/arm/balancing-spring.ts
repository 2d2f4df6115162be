import { unloaded, worstNm } from './balance.ts';
import { GRAVITY_MS2 } from './bodies.ts';
import { chain as makeChain } from './chain.ts';
import { length } from './extent.ts';
import { loads } from './load.ts';
import { massMoment } from './mass-moment.ts';
import { passive } from './passive.ts';
import type { ArmSpec, LinkSpec, SpringSpec, Vec3 } from './spec.ts';
import { spread } from './spread.ts';
import { worst, type Worst } from './worst.ts';

export interface SpringRequest {
  readonly joint: number;
  /** How far above the axis its fixed end is held, on the link before, and how far along this link the other, metres. */
  readonly aboveM: number;
  readonly alongM: number;
  /** Its length without load, metres; 0 for one that a cord over a pulley makes so. */
  readonly freeM: number;
  /** Ranges in joint order, radians. */
  readonly minRad: ArrayLike<number>;
  readonly maxRad: ArrayLike<number>;
}

export interface BalancingSpring {
  readonly spring: SpringSpec;
  /** Greatest static torque of the joint with the spring over all ranges, without payload or with all of it, and where. */
  readonly after: Worst;
  /** Whether the fixed end keeps its place above the axis in every pose, so that a spring without free length is exact. */
  readonly fixed: boolean;
}

/** Turning of the vertical, as seen from the link before, that is rounding. */
const FIXED = 1e-9;
/** Poses looked at for a real spring. */
const POSES = 4000;

/**
 * The spring that balances a joint as a counterweight would. Without free length its stiffness is m g L / (a b) (fixed end
 * a above the axis, other end b along the line to the centre of mass at L), and it is exact for as long as its fixed end
 * does not turn. A real one, which pulls nothing at its free length, gets the stiffness with the least squares of what is
 * left over the ranges.
 * @returns null where nothing pulls at the joint, or where its axis stands upright
 */
export function balancingSpring(spec: ArmSpec, request: SpringRequest): BalancingSpring | null {
  const { joint, minRad, maxRad, aboveM, alongM, freeM } = request;
  const i = spec.links.findIndex((link) => link.joint === joint);
  if (i < 0) return null;
  const bare: ArmSpec = { ...spec, links: spec.links.map((one, k) => (k === i ? { ...one, spring: null } : one)) };
  const { middleKgM } = massMoment([unloaded(bare), bare], i, minRad, maxRad);
  const { up, fixed } = vertical(bare, i, minRad, maxRad);
  const across = length(up);
  const moment = length(middleKgM);
  if (moment === 0 || across < FIXED) return null;
  const end = spec.links[i - 1]?.toM ?? [0, 0, 0];
  const fromM = plus(end, scaled(up, aboveM / across));
  const toM = scaled(middleKgM, alongM / moment);
  const ideal: SpringSpec = { nPerM: (GRAVITY_MS2 * across * moment) / (aboveM * alongM), freeM: 0, fromM, toM };
  const spring = freeM === 0 ? ideal : fitted(bare, i, { ...ideal, freeM }, minRad, maxRad);
  return { spring, after: worstNm(withSpring(bare, i, spring), joint, minRad, maxRad), fixed };
}

function scaled([x, y, z]: Vec3, by: number): Vec3 {
  return [by * x, by * y, by * z];
}

function plus(a: Vec3, b: Vec3): Vec3 {
  return [a[0] + b[0], a[1] + b[1], a[2] + b[2]];
}

function withSpring(spec: ArmSpec, link: number, spring: SpringSpec): ArmSpec {
  return { ...spec, links: spec.links.map((one, k) => (k === link ? { ...one, spring } : one)) };
}

/** The vertical across the axis, seen from the link before: with the joints before it in the middle, and whether it stays. */
function vertical(
  spec: ArmSpec,
  link: number,
  minRad: ArrayLike<number>,
  maxRad: ArrayLike<number>,
): { up: Vec3; fixed: boolean } {
  const chain = makeChain(spec);
  const { axis, joint } = spec.links[link] as LinkSpec;
  const middle = Float64Array.from(minRad, (low, j) => 0.5 * (low + (maxRad[j] as number)));
  // At its own zero angle a link is parallel to the one before.
  middle[joint] = 0;
  const seen = (pose: Float64Array): Vec3 => {
    chain.pose(pose);
    const [x, y, z] = chain.turn.subarray(9 * link + 6, 9 * link + 9) as unknown as Vec3;
    const along = x * axis[0] + y * axis[1] + z * axis[2];
    return [x - along * axis[0], y - along * axis[1], z - along * axis[2]];
  };
  const up = seen(middle);
  const inner = spec.links.slice(0, link).map((one) => one.joint);
  const stray = worst({ minRad, maxRad, joints: inner }, (pose) => {
    const at = pose.slice();
    at[joint] = 0;
    const now = seen(at);
    return Math.hypot(now[0] - up[0], now[1] - up[1], now[2] - up[2]);
  });
  return { up, fixed: stray.value < FIXED };
}

/** The stiffness with the least squares of torque over the ranges, with and without payload. */
function fitted(
  spec: ArmSpec,
  link: number,
  spring: SpringSpec,
  minRad: ArrayLike<number>,
  maxRad: ArrayLike<number>,
): SpringSpec {
  const { joint } = spec.links[link] as LinkSpec;
  const pulls = passive(withSpring(spec, link, { ...spring, nPerM: 1 }));
  const cables = passive(spec);
  const places = spread(minRad.length);
  const pull = new Float64Array(spec.links.length);
  const torque = new Float64Array(minRad.length);
  let product = 0;
  let square = 0;
  for (const one of [unloaded(spec), spec]) {
    const { torqueNm } = loads(one, minRad.length);
    for (let n = 1; n <= POSES; n++) {
      const pose = Float64Array.from(minRad, (low, j) => low + ((maxRad[j] as number) - low) * places.at(n, j));
      torqueNm(pose, torque);
      pull.fill(0);
      pulls.addHeld(pose, pull);
      const both = pull[link] as number;
      pull.fill(0);
      cables.addHeld(pose, pull);
      const unit = both - (pull[link] as number);
      product -= unit * (torque[joint] as number);
      square += unit * unit;
    }
  }
  return { ...spring, nPerM: square === 0 ? 0 : Math.max(0, product / square) };
}
