import type { Braking } from './braking.ts';
import type { Chain } from './chain.ts';
import { keepOuts } from './keep-outs.ts';
import type { KeepOut } from './spec.ts';
import type { StepBounds } from './step-bounds.ts';

/** Judges whether a link enters a keep-out, in a step or while braking from its end. */
export interface KeepOutJudge {
  /** Takes the chain's present pose as where the step begins. */
  begin(): void;
  breaks(x0: Float64Array, x: Float64Array, v: Float64Array): boolean;
}

export function certifyKeepOuts(
  chain: Chain,
  way: Braking,
  bounds: StepBounds,
  list: readonly KeepOut[],
): KeepOutJudge {
  const { at, links } = chain;
  const places = keepOuts(list);
  const begun = new Float64Array(at.length);
  const before = new Float64Array(at.length);
  const turned = new Float64Array(way.at.length);
  const stand = new Float64Array(way.at.length);
  const reachBefore = new Float64Array(links + 1);
  const reachNow = new Float64Array(links + 1);
  const bulgeM = new Float64Array(links + 1);
  const turning = new Float64Array(1);

  return {
    begin() {
      begun.set(at);
      places.begin(begun);
    },
    breaks(x0, x, v) {
      // Cheap first: clear by more than the arm can move on its way to a stand.
      way.stand(x, v, stand);
      bounds.wayInto(x0, x, stand, turned);
      bounds.reachInto(turned, reachNow);
      if (!places.near(begun, reachNow)) return false;
      bounds.differ(x0, x, turned);
      bounds.reachInto(turned, reachBefore);
      bounds.turnInto(turned, turning, 0);
      for (let k = 1; k <= links; k++) bulgeM[k] = ((turning[0] as number) * (reachBefore[k] as number)) / 8;
      chain.pose(x);
      if (places.entered(begun, at, bulgeM)) return true;
      way.plan(x, v);
      way.look(0);
      bounds.reachInto(way.speed, reachBefore);
      for (let look = 1; look <= way.pieces; look++) {
        bounds.turnInto(way.speed, turning, 0);
        before.set(at);
        way.look(look);
        chain.pose(way.at);
        bounds.reachInto(way.speed, reachNow);
        const h = (way.timeS[look] as number) - (way.timeS[look - 1] as number);
        for (let k = 1; k <= links; k++) {
          const most = reachBefore[k] as number;
          bulgeM[k] = (h * (most - (reachNow[k] as number)) + h * h * (turning[0] as number) * most) / 8;
        }
        if (places.entered(before, at, bulgeM)) return true;
        reachBefore.set(reachNow);
      }
      return false;
    },
  };
}
