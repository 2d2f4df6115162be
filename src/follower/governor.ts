import { type Rows, rowsOf } from './rows.ts';

/**
 * Keeps every joint of an arm inside its speed and acceleration limits, and never overshoots a standing target.
 *
 * Each step follows the continuous minimum-time motion (accelerate, coast, brake) from the present position and speed to
 * the target, sampled at dt: T. Kröger and F. M. Wahl, "Online Trajectory Generation", IEEE Trans. Robotics 26 (2010)
 * 94-111 (from memory). The usual recurrence v = sqrt(2 A e) overshoots when sampled; this does not, whatever dt is.
 * The law it cannot escape: following a moving target without knowing its speed costs v^2 / 2A of lag.
 */
export interface Governor extends Motion {
  /** Moves every joint by dtS[0] seconds towards its target. */
  step(dtS: Float64Array): void;
  /** True when no joint moves. */
  still(): boolean;
}

/** The state of joints in motion, one entry a joint. */
export interface Motion {
  /** Commanded position, radians. */
  readonly x: Float64Array;
  /** Commanded speed at the end of the last step, rad/s. */
  readonly v: Float64Array;
  /** Speed limits in force, rad/s; a joint above a limit that was just lowered brakes down to it. */
  readonly speed: Float64Array;
  /** Acceleration limits, rad/s^2. */
  readonly accel: Float64Array;
  /** Where to, radians, at the end of the step. */
  readonly target: Float64Array;
  /** Speed of the target, rad/s: 0 unless it is known, as in unison. A filter's slope is no such knowledge. */
  readonly targetSpeed: Float64Array;
  /** 1: this joint comes to a stand as soon as it can, whatever its target. */
  readonly braking: Uint8Array;
}

export interface JointLimits {
  readonly accelRadS2: number;
  readonly minRad: number;
  readonly maxRad: number;
}

/** Below this a remaining distance is rounding, radians. */
const REST_RAD = 1e-12;
/** The bare name `Infinity` is a variable to the engine, and choosing between it and a number would make garbage. */
const FOREVER_S = Number.POSITIVE_INFINITY;

/** Governors of several arms, and the tables that hold all their joints, arm after arm. */
export interface Governors {
  readonly each: readonly Governor[];
  readonly all: Motion;
  /** Moves one arm's joints by dtS[0] seconds. */
  step(rows: Rows, dtS: Float64Array): void;
  /** True when no joint of the arm moves. */
  still(rows: Rows): boolean;
}

export function governor(limits: readonly JointLimits[]): Governor {
  return governors([limits]).each[0] as Governor;
}

export function governors(arms: readonly (readonly JointLimits[])[]): Governors {
  const limits = arms.flat();
  const n = limits.length;
  const x = new Float64Array(n);
  const v = new Float64Array(n);
  const speed = new Float64Array(n);
  const target = new Float64Array(n);
  const targetSpeed = new Float64Array(n);
  const braking = new Uint8Array(n);
  const accel = Float64Array.from(limits, (l) => l.accelRadS2);
  const min = Float64Array.from(limits, (l) => l.minRad);
  const max = Float64Array.from(limits, (l) => l.maxRad);
  const standing = new Float64Array(n);
  const xBefore = new Float64Array(n);
  const vBefore = new Float64Array(n);

  const allZero = (list: Float64Array, { from, to }: Rows): boolean => {
    for (let j = from; j < to; j++) if (list[j] !== 0) return false;
    return true;
  };

  /** Moves joints `from` to `to - 1`, each towards its target, which itself moves at its entry of `vtOf`. */
  const advance = (from: number, to: number, dtS: Float64Array, vtOf: Float64Array): void => {
    const dt = dtS[0] as number;
    for (let j = from; j < to; j++) {
      const A = accel[j] as number;
      // A division takes as long as ten sums.
      const perA = 1 / A;
      const x0 = x[j] as number;
      const v0 = v[j] as number;
      if (braking[j] === 1) {
        const sign = v0 < 0 ? -1 : 1;
        const t = Math.min(dt, Math.abs(v0) * perA);
        x[j] = x0 + v0 * t - 0.5 * sign * A * t * t;
        v[j] = t < dt ? 0 : v0 - sign * A * t;
        continue;
      }
      const r = target[j] as number;
      // A target faster than the joint may be is followed at the limit.
      const top = speed[j] as number;
      const vt = Math.min(Math.max(vtOf[j] as number, -top), top);
      const e = r - vt * dt - x0;
      const u0 = v0 - vt;
      const past = e - 0.5 * u0 * Math.abs(u0) * perA;
      // Seen from the moving target and along s, the way the arm has to turn next: distance D, speed u, speed allowed W.
      const s = past > 0 ? 1 : past < 0 ? -1 : u0 < 0 ? -1 : 1;
      const D = s * e;
      const u = s * u0;
      const W = Math.max(0, top - s * vt);
      const peak = u > W ? W : Math.max(u, Math.min(W, Math.sqrt(Math.max(0, A * D + 0.5 * u * u))));
      const t1 = Math.abs(peak - u) * perA;
      if (dt <= t1) {
        const a = peak > u ? A : -A;
        x[j] = x0 + s * (u * dt + 0.5 * a * dt * dt) + vt * dt;
        v[j] = vt + s * (u + a * dt);
        continue;
      }
      // Computed only now: the first phase is the one that an arm on its way behind a hand is mostly in.
      const d1 = 0.5 * (u + peak) * t1;
      const left = D - d1;
      const t2 = peak > 0 ? Math.max(0, left - 0.5 * peak * peak * perA) / peak : left > REST_RAD ? FOREVER_S : 0;
      const rest = t1 + t2 + peak * perA - dt;
      if (dt <= t1 + t2) {
        x[j] = x0 + s * (d1 + peak * (dt - t1)) + vt * dt;
        v[j] = vt + s * peak;
      } else if (rest > 0) {
        x[j] = x0 + s * (D - 0.5 * A * rest * rest) + vt * dt;
        v[j] = vt + s * A * rest;
      } else {
        x[j] = r;
        v[j] = vt;
      }
    }
  };

  /** True where joint j could no longer brake inside its range. */
  const tooFast = (j: number): boolean => {
    const stop = (x[j] as number) + (0.5 * (v[j] as number) * Math.abs(v[j] as number)) / (accel[j] as number);
    return stop < (min[j] as number) || stop > (max[j] as number);
  };

  const step = (rows: Rows, dtS: Float64Array): void => {
    const { from, to } = rows;
    if (allZero(targetSpeed, rows)) {
      advance(from, to, dtS, standing);
      return;
    }
    for (let j = from; j < to; j++) {
      xBefore[j] = x[j] as number;
      vBefore[j] = v[j] as number;
    }
    advance(from, to, dtS, targetSpeed);
    for (let j = from; j < to; j++) {
      if (targetSpeed[j] === 0 || braking[j] === 1 || !tooFast(j)) continue;
      // Matching a target that rushes into the range's end would carry the arm past it: aim at the end, standing.
      x[j] = xBefore[j] as number;
      v[j] = vBefore[j] as number;
      advance(j, j + 1, dtS, standing);
    }
  };

  const still = (rows: Rows): boolean => allZero(v, rows);

  const each = rowsOf(arms.map((arm) => arm.length)).map((rows): Governor => {
    const { from, to } = rows;
    return {
      x: x.subarray(from, to),
      v: v.subarray(from, to),
      speed: speed.subarray(from, to),
      accel: accel.subarray(from, to),
      target: target.subarray(from, to),
      targetSpeed: targetSpeed.subarray(from, to),
      braking: braking.subarray(from, to),
      step: (dtS) => step(rows, dtS),
      still: () => still(rows),
    };
  });
  return { each, all: { x, v, speed, accel, target, targetSpeed, braking }, step, still };
}
