import type { Braking } from './braking.ts';
import type { Chain } from './chain.ts';
import type { StepBounds } from './step-bounds.ts';

/** Judges the speed of every link end, in a step and while braking from its end. */
export interface EndSpeedJudge {
  /** Takes the chain's present pose as where the step begins. */
  begin(): void;
  /** @param endSpeedMS the cap, m/s; Infinity: none */
  breaks(x0: Float64Array, x: Float64Array, v: Float64Array, dtS: Float64Array, endSpeedMS: Float64Array): boolean;
}

/** A speed counts as over the cap from this share of it on: less is rounding. */
const CAP_SHARE = 1 - 1e-9;

export function certifyEndSpeed(chain: Chain, way: Braking, bounds: StepBounds): EndSpeedJudge {
  const { at, links } = chain;
  const begun = new Float64Array(at.length);
  const velocity = new Float64Array(at.length);
  const turned = new Float64Array(way.at.length);
  const reachBefore = new Float64Array(links + 1);
  const reachNow = new Float64Array(links + 1);
  /** Speed of the fastest link end, m/s, and of all joints together, rad/s: at the look before, and at this one. */
  const fastest = new Float64Array(2);
  const turning = new Float64Array(2);
  /** The cap, m/s, and how far a link end may go in the step, metres. */
  const limit = new Float64Array(2);

  const fastestInto = (i: number): void => {
    chain.pose(way.at);
    chain.velocities(way.speed, velocity);
    longest(velocity, fastest, i);
  };

  /** True where the step itself takes a link end further than limit[1]. */
  const wentTooFar = (x: Float64Array): boolean => {
    chain.pose(x);
    for (let k = 0; k < at.length; k++) velocity[k] = (at[k] as number) - (begun[k] as number);
    longest(velocity, fastest, 0);
    return (fastest[0] as number) > (limit[1] as number);
  };

  /** True where a link end is too fast somewhere on the way to a stand. */
  const speeds = (x: Float64Array, v: Float64Array): boolean => {
    const cap = limit[0] as number;
    way.plan(x, v);
    way.look(0);
    fastestInto(0);
    if ((fastest[0] as number) > cap) return true;
    bounds.reachInto(way.speed, reachBefore);
    bounds.turnInto(way.speed, turning, 0);
    for (let k = 1; k <= way.pieces; k++) {
      way.look(k);
      fastestInto(1);
      bounds.reachInto(way.speed, reachNow);
      bounds.turnInto(way.speed, turning, 1);
      const h = (way.timeS[k] as number) - (way.timeS[k - 1] as number);
      const turn = h * (turning[0] as number);
      const most = reachBefore[links] as number;
      const slowing = most - (reachNow[links] as number);
      const bend = 2 * turn * slowing + (1.5 * turn * turn + turn - h * (turning[1] as number)) * most;
      if (Math.max(fastest[0] as number, fastest[1] as number) + bend / 8 > cap) return true;
      // From here on the cheap bound does.
      if ((reachNow[links] as number) <= cap) return false;
      fastest[0] = fastest[1] as number;
      turning[0] = turning[1] as number;
      reachBefore.set(reachNow);
    }
    return false;
  };

  return {
    begin() {
      begun.set(at);
    },
    breaks(x0, x, v, dtS, endSpeedMS) {
      if (endSpeedMS[0] === Number.POSITIVE_INFINITY) return false;
      limit[0] = CAP_SHARE * (endSpeedMS[0] as number);
      limit[1] = (limit[0] as number) * (dtS[0] as number);
      bounds.differ(x0, x, turned);
      bounds.reachInto(turned, reachBefore);
      bounds.reachInto(v, reachNow);
      // Cheap first: joint speeds only fall while braking, so this bound holds for the whole path.
      const surely = (reachNow[links] as number) <= (limit[0] as number);
      if (surely && (reachBefore[links] as number) <= (limit[1] as number)) return false;
      return wentTooFar(x) || speeds(x, v);
    },
  };
}

/** out[i] = length of the longest of the vectors of three, the first left out: it does not move. */
function longest(vectors: Float64Array, out: Float64Array, i: number): void {
  out[i] = 0;
  for (let k = 3; k < vectors.length; k += 3) {
    const x = vectors[k] as number;
    const y = vectors[k + 1] as number;
    const z = vectors[k + 2] as number;
    const square = x * x + y * y + z * z;
    if (square > (out[i] as number)) out[i] = square;
  }
  out[i] = Math.sqrt(out[i] as number);
}
