import { chain as makeChain } from './chain.ts';
import { leversM } from './extent.ts';
import { keepOuts } from './keep-outs.ts';
import type { ArmSpec, KeepOut } from './spec.ts';

/** What a whole arm, not one joint, has to keep. */
export interface ArmLimits {
  /** Cap on the speed of every link end, m/s; null: none. */
  readonly endSpeedMS: number | null;
  readonly keepOut: readonly KeepOut[];
}

/** Bits of what a state breaks. */
export const BREAKS = { endSpeed: 1, keepOut: 2, load: 4 } as const;

/**
 * Judges whether an arm can still brake inside every limit: a step is taken only if the whole braking path from its
 * end keeps them, and the braking path itself is then always there to fall back on (the reference-governor idea,
 * E. Gilbert, I. Kolmanovsky, Automatica 38 (2002) 2063-2073; from memory).
 */
export interface Certificate {
  /**
   * Judges a step from standing or moving at `x0` to position `x` and speed `v` after dtS[0] seconds.
   * @param endSpeedMS cap in force for this step, m/s; Infinity: none
   * @param weigh whether loads count: parking and braking only warn
   * @returns bits of `BREAKS`, 0 when the step may be taken
   */
  judge(
    x0: Float64Array,
    x: Float64Array,
    v: Float64Array,
    dtS: Float64Array,
    endSpeedMS: Float64Array,
    weigh: boolean,
  ): number;
}

/** Torque of every joint against what its motor may hold: > 1 is over. Filled for the chain's pose by `arm/load`. */
export type LoadShares = (anglesRad: Float64Array, out: Float64Array) => void;

/** Looks along the braking path. */
const SAMPLES = 12;
/** Speed between two looks may bulge a little over both: kept inside the cap by this share. */
const BULGE = 0.99;
/** A load or a depth that grows by less is rounding. */
const ROUNDING = 1e-9;

/**
 * @param accelRadS2 acceleration limit of each joint: how hard it brakes
 * @param loads null: loads are not limited
 */
export function certificate(
  spec: ArmSpec,
  joints: number,
  accelRadS2: Float64Array,
  limits: ArmLimits,
  loads: LoadShares | null,
): Certificate {
  const chain = makeChain(spec);
  const levers = leversM(spec);
  const places = keepOuts(limits.keepOut);
  const ends = 3 * (chain.links + 1);
  const before = new Float64Array(ends);
  const jacobian = new Float64Array(3 * chain.links);
  const at = new Float64Array(joints);
  const speed = new Float64Array(joints);
  const gap = new Float64Array(1);
  const sharesFrom = new Float64Array(joints);
  const shares = new Float64Array(joints);
  const time = new Float64Array(1);

  /** Joint state after braking for time[0] seconds from (x, v). */
  const braked = (x: Float64Array, v: Float64Array): void => {
    for (let j = 0; j < joints; j++) {
      const v0 = v[j] as number;
      const A = accelRadS2[j] as number;
      const sign = v0 < 0 ? -1 : 1;
      const t = Math.min(time[0] as number, Math.abs(v0) / A);
      at[j] = (x[j] as number) + v0 * t - 0.5 * sign * A * t * t;
      speed[j] = v0 - sign * A * t;
    }
  };

  const stoppingS = (v: Float64Array): number => {
    let longest = 0;
    for (let j = 0; j < joints; j++) longest = Math.max(longest, Math.abs(v[j] as number) / (accelRadS2[j] as number));
    return longest;
  };

  /** Most any link end can move while the joints go from a to b. */
  const travelBound = (a: Float64Array, b: Float64Array): number => {
    let sum = 0;
    for (let i = 0; i < chain.links; i++) {
      const j = jointOf(i);
      sum += (levers[i] as number) * Math.abs((b[j] as number) - (a[j] as number));
    }
    return sum;
  };

  const jointOf = (link: number): number => (spec.links[link] as ArmSpec['links'][number]).joint;

  const boundMS = (v: Float64Array): number => {
    let sum = 0;
    for (let i = 0; i < chain.links; i++) sum += (levers[i] as number) * Math.abs(v[jointOf(i)] as number);
    return sum;
  };

  /** Fastest link end at the chain's pose with joint speeds v. */
  const fastestMS = (v: Float64Array): number => {
    let fastest = 0;
    for (let k = 0; k < chain.links; k++) {
      chain.jacobian(chain.at, 3 * (k + 1), k, jacobian);
      let sx = 0;
      let sy = 0;
      let sz = 0;
      for (let i = 0; i <= k; i++) {
        const vi = v[jointOf(i)] as number;
        sx += (jacobian[3 * i] as number) * vi;
        sy += (jacobian[3 * i + 1] as number) * vi;
        sz += (jacobian[3 * i + 2] as number) * vi;
      }
      fastest = Math.max(fastest, Math.sqrt(sx * sx + sy * sy + sz * sz));
    }
    return fastest;
  };

  /** Farthest a link end has gone since `before` was taken. */
  const farthestM = (): number => {
    let farthest = 0;
    for (let k = 3; k < ends; k += 3) {
      const dx = (chain.at[k] as number) - (before[k] as number);
      const dy = (chain.at[k + 1] as number) - (before[k + 1] as number);
      const dz = (chain.at[k + 2] as number) - (before[k + 2] as number);
      farthest = Math.max(farthest, Math.sqrt(dx * dx + dy * dy + dz * dz));
    }
    return farthest;
  };

  const speedBroken = (x0: Float64Array, x: Float64Array, v: Float64Array, dt: number, cap: number): boolean => {
    // Cheap first: joint speeds only fall while braking, so this bound holds for the whole path.
    const chordBound = travelBound(x0, x);
    if (boundMS(v) <= BULGE * cap && chordBound <= BULGE * cap * dt) return false;
    chain.pose(x0);
    before.set(chain.at);
    chain.pose(x);
    if (farthestM() > BULGE * cap * dt) return true;
    const stopS = stoppingS(v);
    for (let s = 0; s < SAMPLES; s++) {
      time[0] = (stopS * s) / SAMPLES;
      braked(x, v);
      chain.pose(at);
      if (fastestMS(speed) > BULGE * cap) return true;
    }
    return false;
  };

  const clearanceAt = (pose: Float64Array): number => {
    chain.pose(pose);
    places.clearance(chain, gap);
    return gap[0] as number;
  };

  /**
   * Every look along the way is clear by half the way to its neighbours, so that everything between two looks is clear
   * too; or it is no nearer than the arm was: one that stands close, or inside already, must be able to leave.
   */
  const enters = (x0: Float64Array, x: Float64Array, v: Float64Array): boolean => {
    time[0] = Number.POSITIVE_INFINITY;
    braked(x, v);
    const way = travelBound(x, at) + travelBound(x0, x);
    const now = clearanceAt(x);
    // Cheap first: clear by more than the arm can move on its way to a stand.
    if (now >= way) return false;
    const from = clearanceAt(x0) - ROUNDING;
    if (now < 0.5 * travelBound(x0, x) && now < from) return true;
    const stopS = stoppingS(v);
    for (let s = 1; s <= SAMPLES; s++) {
      time[0] = (stopS * (s - 1)) / SAMPLES;
      braked(x, v);
      // Joint speeds only fall: the next stretch is no longer than this.
      const stretch = (boundMS(speed) * stopS) / SAMPLES;
      time[0] = (stopS * s) / SAMPLES;
      braked(x, v);
      const there = clearanceAt(at);
      if (there < 0.5 * stretch && there < from) return true;
    }
    return false;
  };

  const overloads = (x0: Float64Array, x: Float64Array, v: Float64Array, load: LoadShares): boolean => {
    load(x0, sharesFrom);
    const stopS = stoppingS(v);
    for (let s = 0; s <= SAMPLES; s += SAMPLES / 4) {
      time[0] = (stopS * s) / SAMPLES;
      braked(x, v);
      load(at, shares);
      for (let j = 0; j < joints; j++) {
        if ((shares[j] as number) > Math.max(1, (sharesFrom[j] as number) + ROUNDING)) return true;
      }
    }
    return false;
  };

  return {
    judge(x0, x, v, dtS, endSpeedMS, weigh) {
      const cap = endSpeedMS[0] as number;
      if (cap !== Number.POSITIVE_INFINITY && speedBroken(x0, x, v, dtS[0] as number, cap)) return BREAKS.endSpeed;
      if (places.some && enters(x0, x, v)) return BREAKS.keepOut;
      if (weigh && loads !== null && overloads(x0, x, v, loads)) return BREAKS.load;
      return 0;
    },
  };
}
