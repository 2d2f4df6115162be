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
  const turning = new Float64Array(2);
  const bends = new Float64Array(1);
  const room = new Float64Array(3);

  /** False when no load can come over its limit before the arm stands. */
  const near = (x0: Float64Array, x: Float64Array, v: Float64Array): boolean => {
    way.stand(x, v, stand);
    bounds.wayInto(x0, x, stand, turned);
    bounds.turnInto(turned, turning, 0);
    for (let j = 0; j < joints; j++) {
      if ((begun[j] as number) + (slope[j] as number) * (turning[0] as number) > 1) return true;
    }
    return false;
  };

  /**
   * True unless every load keeps its limit from `before` to `now`, bending between them by `bend` times bends[0]. One
   * that is over it may not get worse, and must be able to come down: it is compared at the looks only.
   */
  const broken = (): boolean => {
    for (let j = 0; j < joints; j++) {
      const share = now[j] as number;
      const from = before[j] as number;
      if (Number.isNaN(share)) continue;
      if (from > 1) {
        if (share > from + ROUNDING) return true;
        continue;
      }
      room[0] = 1 - from;
      room[1] = 1 - share;
      room[2] = ((bends[0] as number) * (bend[j] as number)) / 8;
      if (!staysOut(room)) return true;
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
      bounds.turnInto(turned, turning, 0);
      before.set(begun);
      loads.worst(x, now);
      bends[0] = 1.5 * (turning[0] as number) * (turning[0] as number);
      if (broken()) return true;
      way.plan(x, v);
      way.look(0);
      bounds.turnInto(way.speed, turning, 0);
      for (let look = 1; look <= way.pieces; look++) {
        before.set(now);
        way.look(look);
        loads.worst(way.at, now);
        bounds.turnInto(way.speed, turning, 1);
        const h = (way.timeS[look] as number) - (way.timeS[look - 1] as number);
        const turn = h * (turning[0] as number);
        bends[0] = 1.5 * turn * turn + turn - h * (turning[1] as number);
        if (broken()) return true;
        turning[0] = turning[1] as number;
      }
      return false;
    },
  };
}
