import type { Motion } from './governor.ts';
import { LIMITS } from './reasons.ts';
import type { Rows } from './rows.ts';
import type { FollowerSpec } from './spec.ts';

/** What arms are asked for, joint by joint, on the way from the remap to the governor: tables, arm after arm. */
export interface Wish {
  /** What the remap makes of the leader's pose, with the clutch's offset, radians. */
  readonly wantedRad: Float64Array;
  /** Added to what is asked, radians; grows while the clutch is out. */
  readonly clutchRad: Float64Array;
  /** 1: a pot that feeds this joint is sick, and the joint keeps its target. */
  readonly held: Uint8Array;
  /** Bits of `LIMITS` for each joint. */
  readonly limits: Uint8Array;
  /**
   * Clutch, then deadband, then range, for one arm: the governor's target trails what is wanted by at most the deadband,
   * without steps (backlash form: target = clamp(previous target, wanted - d, wanted + d)), and stays inside the joint's
   * range. The target stands. Writes `limits` anew, and lets held joints brake.
   * @param clutched what is wanted stays, and the clutch takes up the difference
   */
  settle(rows: Rows, clutched: boolean): void;
  /**
   * The same without deadband or clutch: the asked-for angles come from a virtual leader, which is deadbanded and limited
   * already, and the governor's `targetSpeed` stays as it is, but for a target cut off at the end of its range.
   */
  match(rows: Rows): void;
  /**
   * Angles of its own instead, radians, and the speeds that go with them, rad/s, of the one arm: no deadband.
   * @param clutched as in `settle`
   */
  pursue(rows: Rows, anglesRad: Float64Array, speedsRadS: Float64Array, clutched: boolean): void;
}

/**
 * @param motion the governors' tables, arm after arm
 * @param askedRad what the remap makes of the leader's pose, arm after arm
 */
export function wish(specs: readonly FollowerSpec[], motion: Motion, askedRad: Float64Array): Wish {
  const joints = specs.flatMap((spec) => spec.joints);
  const n = joints.length;
  const deadband = Float64Array.from(joints, (j) => j.deadbandRad);
  const min = Float64Array.from(joints, (j) => j.minRad);
  const max = Float64Array.from(joints, (j) => j.maxRad);
  const wantedRad = Float64Array.from(joints, (j) => j.restRad);
  const clutchRad = new Float64Array(n);
  const held = new Uint8Array(n);
  const limits = new Uint8Array(n);
  const { target, targetSpeed, braking } = motion;

  /** Without a deadband: the target is what is wanted, inside the range; true where it is. */
  const take = (r: number, want: number): boolean => {
    const inside = Math.min(Math.max(want, min[r] as number), max[r] as number);
    wantedRad[r] = want;
    target[r] = inside;
    braking[r] = held[r] as number;
    limits[r] = (inside !== want ? LIMITS.range : 0) | (held[r] === 1 ? LIMITS.sick : 0);
    return inside === want;
  };

  return {
    wantedRad,
    clutchRad,
    held,
    limits,
    settle({ from, to }, clutched) {
      const { range, deadband: trails, sick } = LIMITS;
      for (let r = from; r < to; r++) {
        const before = target[r] as number;
        let want = before;
        if (held[r] === 0) {
          want = clutched ? (wantedRad[r] as number) : (askedRad[r] as number) + (clutchRad[r] as number);
          if (clutched) clutchRad[r] = want - (askedRad[r] as number);
        }
        const d = deadband[r] as number;
        const low = min[r] as number;
        const high = max[r] as number;
        const trailing = Math.min(Math.max(before, want - d), want + d);
        const inside = trailing < low ? low : trailing > high ? high : trailing;
        wantedRad[r] = want;
        target[r] = inside;
        targetSpeed[r] = 0;
        braking[r] = held[r] as number;
        limits[r] = (inside !== trailing ? range : inside !== want ? trails : 0) | (held[r] === 1 ? sick : 0);
      }
    },
    match({ from, to }) {
      for (let r = from; r < to; r++) {
        const want = held[r] === 1 ? (target[r] as number) : (askedRad[r] as number) + (clutchRad[r] as number);
        if (!take(r, want)) targetSpeed[r] = 0;
      }
    },
    pursue({ from, to }, anglesRad, speedsRadS, clutched) {
      for (let r = from; r < to; r++) {
        const angle = anglesRad[r - from] as number;
        if (clutched) clutchRad[r] = (wantedRad[r] as number) - angle;
        const goes = take(r, held[r] === 1 ? (target[r] as number) : angle + (clutchRad[r] as number));
        targetSpeed[r] = goes && !clutched && held[r] === 0 ? (speedsRadS[r - from] as number) : 0;
      }
    },
  };
}
