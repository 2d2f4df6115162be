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
  /** Of the fastest link end, m/s: at the look before, and at this one. */
  const fastest = new Float64Array(2);

  const fastestInto = (i: number): void => {
    chain.pose(way.at);
    chain.velocities(way.speed, velocity);
    let square = 0;
    for (let k = 3; k < velocity.length; k += 3) square = Math.max(square, squaredLength(velocity, k));
    fastest[i] = Math.sqrt(square);
  };

  /** True where the step itself takes a link end further than the cap allows. */
  const wentTooFar = (x: Float64Array, mostM: number): boolean => {
    chain.pose(x);
    for (let k = 0; k < at.length; k++) velocity[k] = (at[k] as number) - (begun[k] as number);
    for (let k = 3; k < velocity.length; k += 3) if (squaredLength(velocity, k) > mostM * mostM) return true;
    return false;
  };

  return {
    begin() {
      begun.set(at);
    },
    breaks(x0, x, v, dtS, endSpeedMS) {
      const cap = CAP_SHARE * (endSpeedMS[0] as number);
      if (cap === Number.POSITIVE_INFINITY) return false;
      const mostM = cap * (dtS[0] as number);
      bounds.differ(x0, x, turned);
      bounds.reachInto(turned, reachBefore);
      bounds.reachInto(v, reachNow);
      // Cheap first: joint speeds only fall while braking, so this bound holds for the whole path.
      if ((reachNow[links] as number) <= cap && (reachBefore[links] as number) <= mostM) return false;
      if (wentTooFar(x, mostM)) return true;
      way.plan(x, v);
      way.look(0);
      fastestInto(0);
      if ((fastest[0] as number) > cap) return true;
      bounds.reachInto(way.speed, reachBefore);
      let turning = bounds.turnOf(way.speed);
      for (let k = 1; k <= way.pieces; k++) {
        way.look(k);
        fastestInto(1);
        bounds.reachInto(way.speed, reachNow);
        const turningNow = bounds.turnOf(way.speed);
        const h = (way.timeS[k] as number) - (way.timeS[k - 1] as number);
        const most = reachBefore[links] as number;
        const slowing = most - (reachNow[links] as number);
        const bend = 2 * h * turning * slowing + (1.5 * h * h * turning * turning + h * (turning - turningNow)) * most;
        if (Math.max(fastest[0] as number, fastest[1] as number) + bend / 8 > cap) return true;
        fastest[0] = fastest[1] as number;
        reachBefore.set(reachNow);
        turning = turningNow;
      }
      return false;
    },
  };
}

function squaredLength(v: Float64Array, k: number): number {
  const x = v[k] as number;
  const y = v[k + 1] as number;
  const z = v[k + 2] as number;
  return x * x + y * y + z * z;
}
