import type { ArmSpec, Vec3 } from './spec.ts';

/**
 * Where every frame of a serial chain is, in the base's level frame: x forward, y left, z up, origin on the floor below
 * the first axis. All arrays are reused and valid until the next `pose`.
 */
export interface Chain {
  readonly spec: ArmSpec;
  readonly links: number;
  /** Index of the profile's joint that turns link i. */
  readonly joint: Uint8Array;
  /** Start of link i at at[3i..3i+2], metres; the tip is the last entry. Length 3 (links + 1). */
  readonly at: Float64Array;
  /** Orientation of link i, row by row, at turn[9i..9i+8]. */
  readonly turn: Float64Array;
  /** Axis of link i, a unit vector, at axis[3i..3i+2]. */
  readonly axis: Float64Array;
  /** Puts the chain at joint angles, radians, in the order of the profile's joints. */
  pose(anglesRad: Float64Array): void;
  /**
   * Geometric Jacobian of a point's position: out[3i..3i+2] = axis_i x (point - at_i), metres per radian, for the links
   * up to `link`; zero beyond. (K. M. Lynch, F. C. Park, Modern Robotics, 2017, ch. 5.)
   * @param point 3 values at point[offset..]
   */
  jacobian(point: Float64Array, offset: number, link: number, out: Float64Array): void;
  /** out[3k..3k+2] = velocity of at[3k..3k+2], m/s, with the profile's joints turning at these speeds. */
  velocities(speedsRadS: Float64Array, out: Float64Array): void;
}

/** A turn about z of the parent's frame mixes its first column with its second; about x and y alike. */
const MIXED: readonly (readonly [number, number])[] = [
  [1, 2],
  [2, 0],
  [0, 1],
];

/** @throws RangeError for an axis that is no unit vector: files are normalised when they are compiled */
export function chain(spec: ArmSpec): Chain {
  const n = spec.links.length;
  const at = new Float64Array(3 * (n + 1));
  // The base's orientation stands before the links', so that every link has one before it.
  const turns = new Float64Array(9 * (n + 1));
  const turn = turns.subarray(9);
  const axis = new Float64Array(3 * n);
  const joint = Uint8Array.from(spec.links, (link) => link.joint);
  const to = Float64Array.from(spec.links.flatMap((link) => [...link.toM]));
  const axes = Float64Array.from(spec.links.flatMap((link) => [...unit(link.axis)]));
  /** 0, 1, 2: about x, y, z; 3: about none of them. */
  const about = Uint8Array.from(spec.links, ({ axis: a }) => (a.includes(1) ? a.indexOf(1) : 3));
  const spin = new Float64Array(9);
  turns.set(baseTurn(spec.base.tiltRad));
  at[2] = spec.base.heightM;

  return {
    spec,
    links: n,
    joint,
    at,
    turn,
    axis,
    pose(anglesRad) {
      for (let i = 0; i < n; i++) {
        const j = joint[i] as number;
        const before = 9 * i;
        const kind = about[i] as number;
        timesInto(turns, before, axes, 3 * i, axis, 3 * i);
        if (kind < 3) turnAbout(MIXED[kind] as readonly [number, number], anglesRad, j, turns, before);
        else {
          rotation(axes, 3 * i, anglesRad, j, spin);
          multiply(turns, before, spin);
        }
        timesInto(turns, before + 9, to, 3 * i, at, 3 * i + 3);
        for (let k = 3 * i; k < 3 * i + 3; k++) at[k + 3] = (at[k + 3] as number) + (at[k] as number);
      }
    },
    jacobian(point, offset, link, out) {
      out.fill(0);
      for (let i = 0; i <= link; i++) {
        const rx = (point[offset] as number) - (at[3 * i] as number);
        const ry = (point[offset + 1] as number) - (at[3 * i + 1] as number);
        const rz = (point[offset + 2] as number) - (at[3 * i + 2] as number);
        const ax = axis[3 * i] as number;
        const ay = axis[3 * i + 1] as number;
        const az = axis[3 * i + 2] as number;
        out[3 * i] = ay * rz - az * ry;
        out[3 * i + 1] = az * rx - ax * rz;
        out[3 * i + 2] = ax * ry - ay * rx;
      }
    },
    velocities(speedsRadS, out) {
      let wx = 0;
      let wy = 0;
      let wz = 0;
      out[0] = 0;
      out[1] = 0;
      out[2] = 0;
      for (let k = 0; k < 3 * n; k += 3) {
        const speed = speedsRadS[joint[k / 3] as number] as number;
        wx += (axis[k] as number) * speed;
        wy += (axis[k + 1] as number) * speed;
        wz += (axis[k + 2] as number) * speed;
        const rx = (at[k + 3] as number) - (at[k] as number);
        const ry = (at[k + 4] as number) - (at[k + 1] as number);
        const rz = (at[k + 5] as number) - (at[k + 2] as number);
        out[k + 3] = (out[k] as number) + wy * rz - wz * ry;
        out[k + 4] = (out[k + 1] as number) + wz * rx - wx * rz;
        out[k + 5] = (out[k + 2] as number) + wx * ry - wy * rx;
      }
    },
  };
}

/** A length this far from one is no rounding. */
const UNIT_ROUNDING = 1e-9;

function unit(axis: Vec3): Vec3 {
  if (!(Math.abs(Math.hypot(...axis) - 1) < UNIT_ROUNDING))
    throw new RangeError(`axis ${axis.join(', ')} is no unit vector`);
  return axis;
}

/** Turn of a base tilted about the level x, then about the level y, row by row. */
export function baseTurn(tiltRad: readonly [number, number]): Float64Array {
  const cx = Math.cos(tiltRad[0]);
  const sx = Math.sin(tiltRad[0]);
  const cy = Math.cos(tiltRad[1]);
  const sy = Math.sin(tiltRad[1]);
  return Float64Array.of(cy, sy * sx, sy * cx, 0, cx, -sx, -sy, cy * sx, cy * cx);
}

/** turns[o+9..] = turns[o..] turned by angles[j] about its own axis that is neither of `mixed`. */
function turnAbout(
  mixed: readonly [number, number],
  angles: Float64Array,
  j: number,
  turns: Float64Array,
  o: number,
): void {
  const angle = angles[j] as number;
  const s = Math.sin(angle);
  const c = Math.cos(angle);
  const [p, q] = mixed;
  const kept = 3 - p - q;
  for (let row = o; row < o + 9; row += 3) {
    const a = turns[row + p] as number;
    const b = turns[row + q] as number;
    turns[row + 9 + p] = c * a + s * b;
    turns[row + 9 + q] = c * b - s * a;
    turns[row + 9 + kept] = turns[row + kept] as number;
  }
}

/** Rodrigues' rotation by angles[j] about the unit axis at axes[o..], row by row. */
function rotation(axes: Float64Array, o: number, angles: Float64Array, j: number, out: Float64Array): void {
  const angle = angles[j] as number;
  const s = Math.sin(angle);
  const c = Math.cos(angle);
  const v = 1 - c;
  const x = axes[o] as number;
  const y = axes[o + 1] as number;
  const z = axes[o + 2] as number;
  out[0] = c + x * x * v;
  out[1] = x * y * v - z * s;
  out[2] = x * z * v + y * s;
  out[3] = y * x * v + z * s;
  out[4] = c + y * y * v;
  out[5] = y * z * v - x * s;
  out[6] = z * x * v - y * s;
  out[7] = z * y * v + x * s;
  out[8] = c + z * z * v;
}

/** turns[o+9..] = turns[o..] spin, 3 by 3, row by row. */
function multiply(turns: Float64Array, o: number, spin: Float64Array): void {
  for (let row = o; row < o + 9; row += 3) {
    const x = turns[row] as number;
    const y = turns[row + 1] as number;
    const z = turns[row + 2] as number;
    for (let column = 0; column < 3; column++)
      turns[row + 9 + column] =
        x * (spin[column] as number) + y * (spin[3 + column] as number) + z * (spin[6 + column] as number);
  }
}

/**
 * out[k..] = a 3 by 3 matrix from m[o..] on, row by row, times a vector from v[vo..] on. Results go into arrays all over
 * this room: a number that crosses a call costs an allocation.
 */
export function timesInto(m: Float64Array, o: number, v: Float64Array, vo: number, out: Float64Array, k: number): void {
  const x = v[vo] as number;
  const y = v[vo + 1] as number;
  const z = v[vo + 2] as number;
  out[k] = (m[o] as number) * x + (m[o + 1] as number) * y + (m[o + 2] as number) * z;
  out[k + 1] = (m[o + 3] as number) * x + (m[o + 4] as number) * y + (m[o + 5] as number) * z;
  out[k + 2] = (m[o + 6] as number) * x + (m[o + 7] as number) * y + (m[o + 8] as number) * z;
}

/** A row of three values times a vector of three, each from its offset on: where nothing is done per command. */
export function rowTimes(rows: Float64Array, row: number, v: Float64Array, o: number): number {
  return (
    (rows[row] as number) * (v[o] as number) +
    (rows[row + 1] as number) * (v[o + 1] as number) +
    (rows[row + 2] as number) * (v[o + 2] as number)
  );
}
