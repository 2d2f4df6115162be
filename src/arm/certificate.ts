import { braking } from './braking.ts';
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
 *
 * Speeds and keep-outs hold between the looks as well: what can happen there is bounded by the second derivative of a
 * link end's place, |p''| <= S' + W S, and of its velocity, |p'''| <= 2 W S' + (3/2 W^2 + W') S, where W, W' are the sums
 * of joint speeds and accelerations and S, S' the same sums with each joint's longest lever. Loads are looked at only
 * at the looks, and kept a little below the limit instead.
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

/** Torque of every joint against what its motor may give, from `arm/load`: > 1 is over; NaN where it is not known. */
export type LoadShares = (anglesRad: Float64Array, out: Float64Array) => void;

/** A speed counts as over the cap from this share of it on: less is rounding. */
const CAP_SHARE = 1 - 1e-9;
/** Loads are kept below this share: between two looks they may bulge a little over it. */
const LOAD_SHARE = 0.99;
/** A load that grows by less is rounding. */
const LOAD_ROUNDING = 1e-9;

/**
 * @param joints how many the profile has
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
  const { links, joint, at } = chain;
  const ends = links + 1;
  const levers = leversM(spec);
  const places = keepOuts(limits.keepOut);
  const way = braking(joints, accelRadS2);
  /** Where the arm was when the step began; where its links were at the look before the present one. */
  const begun = new Float64Array(3 * ends);
  const begunAt = new Float64Array(joints).fill(Number.NaN);
  const before = new Float64Array(3 * ends);
  const velocity = new Float64Array(3 * ends);
  const turned = new Float64Array(joints);
  const stand = new Float64Array(joints);
  /** Sums over the joints with each one's lever to end k: at the look before, at this one. */
  const reachBefore = new Float64Array(ends);
  const reachNow = new Float64Array(ends);
  const bulgeM = new Float64Array(ends);
  const fastest = new Float64Array(2);
  const sharesFrom = new Float64Array(joints);
  const shares = new Float64Array(joints);

  /** Opens the judgement of steps from x0; several steps are judged from one place. */
  const begin = (x0: Float64Array): void => {
    let same = true;
    for (let j = 0; j < joints; j++) if (begunAt[j] !== x0[j]) same = false;
    if (same) return;
    begunAt.set(x0);
    chain.pose(x0);
    begun.set(at);
    places.begin(begun);
    if (loads !== null) loads(x0, sharesFrom);
  };

  /** out[k] = most that end k can move, when every joint moves by `by`. */
  const reachInto = (by: Float64Array, out: Float64Array): void => {
    out.fill(0);
    for (let i = 0; i < links; i++) {
      const most = Math.abs(by[joint[i] as number] as number);
      for (let k = i + 1; k < ends; k++) out[k] = (out[k] as number) + (levers[i * ends + k] as number) * most;
    }
  };

  const turnOf = (by: Float64Array): number => {
    let sum = 0;
    for (let i = 0; i < links; i++) sum += Math.abs(by[joint[i] as number] as number);
    return sum;
  };

  const differ = (a: Float64Array, b: Float64Array): void => {
    for (let j = 0; j < joints; j++) turned[j] = (b[j] as number) - (a[j] as number);
  };

  /** fastest[i] = speed of the fastest link end at the present look, m/s. */
  const fastestInto = (i: number): void => {
    chain.pose(way.at);
    chain.velocities(way.speed, velocity);
    let square = 0;
    for (let k = 3; k < 3 * ends; k += 3) square = Math.max(square, squared(velocity, k));
    fastest[i] = Math.sqrt(square);
  };

  /** Farthest that a link end went in the step, squared. */
  const farthestSquared = (): number => {
    let square = 0;
    for (let k = 3; k < 3 * ends; k += 3) {
      const dx = (at[k] as number) - (begun[k] as number);
      const dy = (at[k + 1] as number) - (begun[k + 1] as number);
      const dz = (at[k + 2] as number) - (begun[k + 2] as number);
      square = Math.max(square, dx * dx + dy * dy + dz * dz);
    }
    return square;
  };

  const tooFast = (x0: Float64Array, x: Float64Array, v: Float64Array, dt: number, cap: number): boolean => {
    differ(x0, x);
    reachInto(turned, reachBefore);
    reachInto(v, reachNow);
    // Cheap first: joint speeds only fall while braking, so this bound holds for the whole path.
    if ((reachNow[links] as number) <= cap && (reachBefore[links] as number) <= cap * dt) return false;
    chain.pose(x);
    if (farthestSquared() > cap * dt * (cap * dt)) return true;
    way.plan(x, v);
    way.look(0);
    fastestInto(0);
    if ((fastest[0] as number) > cap) return true;
    reachInto(way.speed, reachBefore);
    let turning = turnOf(way.speed);
    for (let k = 1; k <= way.pieces; k++) {
      way.look(k);
      fastestInto(1);
      reachInto(way.speed, reachNow);
      const turningNow = turnOf(way.speed);
      const h = (way.timeS[k] as number) - (way.timeS[k - 1] as number);
      const most = reachBefore[links] as number;
      const slowing = most - (reachNow[links] as number);
      const bulge = 2 * h * turning * slowing + (1.5 * h * h * turning * turning + h * (turning - turningNow)) * most;
      if (Math.max(fastest[0] as number, fastest[1] as number) + bulge / 8 > cap) return true;
      fastest[0] = fastest[1] as number;
      reachBefore.set(reachNow);
      turning = turningNow;
    }
    return false;
  };

  const enters = (x0: Float64Array, x: Float64Array, v: Float64Array): boolean => {
    // Cheap first: clear by more than the arm can move on its way to a stand.
    way.stand(x, v, stand);
    for (let j = 0; j < joints; j++) {
      turned[j] = Math.abs((x[j] as number) - (x0[j] as number)) + Math.abs((stand[j] as number) - (x[j] as number));
    }
    reachInto(turned, reachNow);
    if (!places.near(begun, reachNow)) return false;
    differ(x0, x);
    reachInto(turned, reachBefore);
    const turn = turnOf(turned);
    for (let k = 1; k < ends; k++) bulgeM[k] = (turn * (reachBefore[k] as number)) / 8;
    chain.pose(x);
    if (places.entered(begun, at, bulgeM)) return true;
    way.plan(x, v);
    way.look(0);
    reachInto(way.speed, reachBefore);
    let turning = turnOf(way.speed);
    for (let look = 1; look <= way.pieces; look++) {
      before.set(at);
      way.look(look);
      chain.pose(way.at);
      reachInto(way.speed, reachNow);
      const h = (way.timeS[look] as number) - (way.timeS[look - 1] as number);
      for (let k = 1; k < ends; k++) {
        const most = reachBefore[k] as number;
        bulgeM[k] = (h * (most - (reachNow[k] as number)) + h * h * turning * most) / 8;
      }
      if (places.entered(before, at, bulgeM)) return true;
      reachBefore.set(reachNow);
      turning = turnOf(way.speed);
    }
    return false;
  };

  /** No joint gets over its limit; one that is over it already may not get worse. */
  const overloads = (x: Float64Array, v: Float64Array, load: LoadShares): boolean => {
    way.plan(x, v);
    for (let look = 0; look <= way.pieces; look++) {
      way.look(look);
      load(way.at, shares);
      for (let j = 0; j < joints; j++) {
        if ((shares[j] as number) > Math.max(LOAD_SHARE, (sharesFrom[j] as number) + LOAD_ROUNDING)) return true;
      }
    }
    return false;
  };

  return {
    judge(x0, x, v, dtS, endSpeedMS, weigh) {
      begin(x0);
      const cap = CAP_SHARE * (endSpeedMS[0] as number);
      if (cap !== Number.POSITIVE_INFINITY && tooFast(x0, x, v, dtS[0] as number, cap)) return BREAKS.endSpeed;
      if (places.some && enters(x0, x, v)) return BREAKS.keepOut;
      if (weigh && loads !== null && overloads(x, v, loads)) return BREAKS.load;
      return 0;
    },
  };
}

function squared(v: Float64Array, k: number): number {
  const x = v[k] as number;
  const y = v[k + 1] as number;
  const z = v[k + 2] as number;
  return x * x + y * y + z * z;
}
