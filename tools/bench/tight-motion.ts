import type { FollowerJointSpec } from '../../src/follower/spec.ts';

export const IN_RANGE = 1;
const AT_SPEED = 2;
export const IN_DEADBAND = 4;
export const SICK = 8;

const ROUNDING_RAD = 1e-9;

/** The governor's formula and its checks over rows of flat tables. */
export interface TightMotion {
  readonly x: Float64Array;
  readonly v: Float64Array;
  readonly target: Float64Array;
  readonly speed: Float64Array;
  readonly accel: Float64Array;
  readonly min: Float64Array;
  readonly max: Float64Array;
  readonly held: Uint8Array;
  readonly braking: Uint8Array;
  readonly limits: Uint8Array;
  /** Moves rows `first` to `end - 1` by dtS[0] seconds; true when one of them still moves. */
  govern(first: number, end: number, dtS: Float64Array): boolean;
}

export function tightMotion(joints: readonly FollowerJointSpec[]): TightMotion {
  const n = joints.length;
  const min = Float64Array.from(joints, (j) => j.minRad);
  const max = Float64Array.from(joints, (j) => j.maxRad);
  const accel = Float64Array.from(joints, (j) => j.accelRadS2);
  const x = Float64Array.from(joints, (j) => Math.min(Math.max(j.restRad, j.minRad), j.maxRad));
  const v = new Float64Array(n);
  const target = Float64Array.from(x);
  const targetSpeed = new Float64Array(n);
  const speed = new Float64Array(n);
  const held = new Uint8Array(n);
  const braking = new Uint8Array(n);
  const limits = new Uint8Array(n);

  const govern = (first: number, end: number, dtS: Float64Array): boolean => {
    const dt = dtS[0] as number;
    let stirs = false;
    for (let i = first; i < end; i++) {
      const A = accel[i] as number;
      const perA = 1 / A;
      const x0 = x[i] as number;
      const v0 = v[i] as number;
      if (braking[i] === 1) {
        const sign = v0 < 0 ? -1 : 1;
        const t = Math.min(dt, Math.abs(v0) * perA);
        x[i] = x0 + v0 * t - 0.5 * sign * A * t * t;
        v[i] = t < dt ? 0 : v0 - sign * A * t;
      } else {
        const top = speed[i] as number;
        const vt = Math.min(Math.max(targetSpeed[i] as number, -top), top);
        const e = (target[i] as number) - vt * dt - x0;
        const u0 = v0 - vt;
        const past = e - 0.5 * u0 * Math.abs(u0) * perA;
        const s = past > 0 ? 1 : past < 0 ? -1 : u0 < 0 ? -1 : 1;
        const D = s * e;
        const u = s * u0;
        const W = Math.max(0, top - s * vt);
        const peak = u > W ? W : Math.max(u, Math.min(W, Math.sqrt(Math.max(0, A * D + 0.5 * u * u))));
        const t1 = Math.abs(peak - u) * perA;
        if (dt <= t1) {
          const a = peak > u ? A : -A;
          x[i] = x0 + s * (u * dt + 0.5 * a * dt * dt) + vt * dt;
          v[i] = vt + s * (u + a * dt);
        } else {
          const d1 = 0.5 * (u + peak) * t1;
          const left = D - d1;
          const t2 =
            peak > 0
              ? Math.max(0, left - 0.5 * peak * peak * perA) / peak
              : left > 1e-12
                ? Number.POSITIVE_INFINITY
                : 0;
          const rest = t1 + t2 + peak * perA - dt;
          if (dt <= t1 + t2) {
            x[i] = x0 + s * (d1 + peak * (dt - t1)) + vt * dt;
            v[i] = vt + s * peak;
          } else if (rest > 0) {
            x[i] = x0 + s * (D - 0.5 * A * rest * rest) + vt * dt;
            v[i] = vt + s * A * rest;
          } else {
            x[i] = target[i] as number;
            v[i] = vt;
          }
        }
        if (v[i] !== 0 && Math.abs(v[i] as number) >= 0.999 * top) limits[i] = (limits[i] as number) | AT_SPEED;
      }
      const at = x[i] as number;
      if (!(at >= (min[i] as number) - ROUNDING_RAD && at <= (max[i] as number) + ROUNDING_RAD))
        throw new RangeError('left its range');
      if (v[i] !== 0) stirs = true;
    }
    return stirs;
  };

  return { x, v, target, speed, accel, min, max, held, braking, limits, govern };
}
