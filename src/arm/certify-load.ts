import { staysOut } from './box.ts';
import type { Braking } from './braking.ts';
import type { StepBounds } from './step-bounds.ts';

/** Torque of every joint against what its motor may give, above 1 is over, NaN is not known: `Loads` of `load.ts`. */
export interface LoadShares {
  worst(anglesRad: Float64Array, out: Float64Array): void;
  readonly slope: Float64Array;
  readonly bend: Float64Array;
}

/** Judges whether a load comes over its limit, in a step or while braking from its end. */
export interface LoadJudge {
  begin(x0: Float64Array): void;
  breaks(x0: Float64Array, x: Float64Array, v: Float64Array): boolean;
}

/** A load that is over its limit and grows by less is rounding. */
const ROUNDING = 1e-9;

export function certifyLoad(way: Braking, bounds: StepBounds, loads: LoadShares, joints: number): LoadJudge {
  const { slope, bend } = loads;
  const begun = new Float64Array(joints);
  const before = new Float64Array(joints);
  const now = new Float64Array(joints);
  const turned = new Float64Array(joints);
  const stand = new Float64Array(joints);

  /** False when no load can come over its limit before the arm stands. */
  const near = (x0: Float64Array, x: Float64Array, v: Float64Array): boolean => {
    way.stand(x, v, stand);
    bounds.wayInto(x0, x, stand, turned);
    const turn = bounds.turnOf(turned);
    for (let j = 0; j < joints; j++) if ((begun[j] as number) + (slope[j] as number) * turn > 1) return true;
    return false;
  };

  /**
   * True unless every load keeps its limit from `before` to `now`, with a bulge of `bend` for each of `bends` between. One
   * that is over it may not get worse, and must be able to come down: it is compared at the looks only.
   */
  const broken = (bends: number): boolean => {
    for (let j = 0; j < joints; j++) {
      const share = now[j] as number;
      if (Number.isNaN(share)) continue;
      const from = before[j] as number;
      if (from > 1 ? share > from + ROUNDING : !staysOut(1 - from, 1 - share, (bends * (bend[j] as number)) / 8))
        return true;
    }
    return false;
  };

  return {
    begin(x0) {
      loads.worst(x0, begun);
    },
    breaks(x0, x, v) {
      if (!near(x0, x, v)) return false;
      bounds.differ(x0, x, turned);
      const turn = bounds.turnOf(turned);
      before.set(begun);
      loads.worst(x, now);
      if (broken(1.5 * turn * turn)) return true;
      way.plan(x, v);
      way.look(0);
      let turning = bounds.turnOf(way.speed);
      for (let look = 1; look <= way.pieces; look++) {
        before.set(now);
        way.look(look);
        loads.worst(way.at, now);
        const turningNow = bounds.turnOf(way.speed);
        const h = (way.timeS[look] as number) - (way.timeS[look - 1] as number);
        if (broken(1.5 * h * h * turning * turning + h * (turning - turningNow))) return true;
        turning = turningNow;
      }
      return false;
    },
  };
}
