import type { ArmSpec, LinkSpec } from './spec.ts';

/**
 * Where every frame of a serial chain is, in the base's level frame: x forward, y left, z up, origin on the floor below
 * the first axis. All arrays are reused and valid until the next `pose`.
 */
export interface Chain {
  readonly spec: ArmSpec;
  readonly links: number;
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
}

export function chain(spec: ArmSpec): Chain {
  const n = spec.links.length;
  const at = new Float64Array(3 * (n + 1));
  const turn = new Float64Array(9 * n);
  const axis = new Float64Array(3 * n);
  const base = baseTurn(spec.base.tiltRad);
  const spin = new Float64Array(9);
  at[2] = spec.base.heightM;

  return {
    spec,
    links: n,
    at,
    turn,
    axis,
    pose(anglesRad) {
      for (let i = 0; i < n; i++) {
        const link = spec.links[i] as LinkSpec;
        const before = i === 0 ? base : turn;
        const from = i === 0 ? 0 : 9 * (i - 1);
        rotation(link.axis, anglesRad, link.joint, spin);
        multiply(before, from, spin, turn, 9 * i);
        for (let row = 0; row < 3; row++) {
          axis[3 * i + row] = dotRow(before, from + 3 * row, link.axis);
          at[3 * (i + 1) + row] = (at[3 * i + row] as number) + dotRow(turn, 9 * i + 3 * row, link.toM);
        }
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
  };
}

/** Turn of a base tilted about the level x, then about the level y, row by row. */
export function baseTurn(tiltRad: readonly [number, number]): Float64Array {
  const cx = Math.cos(tiltRad[0]);
  const sx = Math.sin(tiltRad[0]);
  const cy = Math.cos(tiltRad[1]);
  const sy = Math.sin(tiltRad[1]);
  return Float64Array.of(cy, sy * sx, sy * cx, 0, cx, -sx, -sy, cy * sx, cy * cx);
}

/** Rodrigues' rotation about a unit axis by angles[j], row by row. */
function rotation(axis: LinkSpec['axis'], angles: Float64Array, j: number, out: Float64Array): void {
  const angle = angles[j] as number;
  const s = Math.sin(angle);
  const c = Math.cos(angle);
  const v = 1 - c;
  const [x, y, z] = axis;
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

/** out[o..] = a[ao..] b, 3 by 3, row by row. */
function multiply(a: Float64Array, ao: number, b: Float64Array, out: Float64Array, o: number): void {
  for (let row = 0; row < 9; row += 3) {
    const x = a[ao + row] as number;
    const y = a[ao + row + 1] as number;
    const z = a[ao + row + 2] as number;
    for (let column = 0; column < 3; column++)
      out[o + row + column] = x * (b[column] as number) + y * (b[3 + column] as number) + z * (b[6 + column] as number);
  }
}

function dotRow(a: Float64Array, o: number, v: readonly [number, number, number]): number {
  return (a[o] as number) * v[0] + (a[o + 1] as number) * v[1] + (a[o + 2] as number) * v[2];
}
