import type { Motion } from './governor.ts';
import { LIMITS } from './reasons.ts';
import { type Rows, rowsOf } from './rows.ts';
import type { FollowerSpec } from './spec.ts';

/** What one arm is asked for, joint by joint, on its way from the remap to the governor. */
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
   * Clutch, then deadband, then range: the governor's target trails what is wanted by at most the deadband, without
   * steps (backlash form: target = clamp(previous target, wanted - d, wanted + d)), and stays inside the joint's range.
   * The target stands. Writes `limits` anew, and lets held joints brake.
   * @param clutched what is wanted stays, and the clutch takes up the difference
   */
  settle(clutched: boolean): void;
}

/** Wishes of several arms, and the tables that hold all their joints, arm after arm. */
export interface Wishes {
  readonly each: readonly Wish[];
  readonly held: Uint8Array;
  readonly limits: Uint8Array;
}

/**
 * @param motion the governors' tables, arm after arm
 * @param asked what the remaps make of the leader's pose, radians, arm after arm
 */
export function wishes(specs: readonly FollowerSpec[], motion: Motion, asked: Float64Array): Wishes {
  const joints = specs.flatMap((spec) => spec.joints);
  const n = joints.length;
  const deadband = Float64Array.from(joints, (j) => j.deadbandRad);
  const min = Float64Array.from(joints, (j) => j.minRad);
  const max = Float64Array.from(joints, (j) => j.maxRad);
  const wanted = Float64Array.from(joints, (j) => j.restRad);
  const clutch = new Float64Array(n);
  const held = new Uint8Array(n);
  const limits = new Uint8Array(n);
  const { target, targetSpeed, braking } = motion;

  const settle = (rows: Rows, clutched: boolean): void => {
    const { range, deadband: trails, sick } = LIMITS;
    for (let r = rows.from; r < rows.to; r++) {
      const before = target[r] as number;
      let want = before;
      if (held[r] === 0) {
        want = clutched ? (wanted[r] as number) : (asked[r] as number) + (clutch[r] as number);
        if (clutched) clutch[r] = want - (asked[r] as number);
      }
      const d = deadband[r] as number;
      const low = min[r] as number;
      const high = max[r] as number;
      const trailing = Math.min(Math.max(before, want - d), want + d);
      const inside = trailing < low ? low : trailing > high ? high : trailing;
      wanted[r] = want;
      target[r] = inside;
      targetSpeed[r] = 0;
      braking[r] = held[r] as number;
      limits[r] = (inside !== trailing ? range : inside !== want ? trails : 0) | (held[r] === 1 ? sick : 0);
    }
  };

  const each = rowsOf(specs.map((spec) => spec.joints.length)).map(
    (rows): Wish => ({
      wantedRad: wanted.subarray(rows.from, rows.to),
      clutchRad: clutch.subarray(rows.from, rows.to),
      held: held.subarray(rows.from, rows.to),
      limits: limits.subarray(rows.from, rows.to),
      settle: (clutched) => settle(rows, clutched),
    }),
  );
  return { each, held, limits };
}
