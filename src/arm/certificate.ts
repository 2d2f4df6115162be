import { braking } from './braking.ts';
import { certifyEndSpeed } from './certify-end-speed.ts';
import { certifyKeepOuts } from './certify-keep-outs.ts';
import { certifyLoad, type LoadShares } from './certify-load.ts';
import { chain as makeChain } from './chain.ts';
import type { ArmSpec, KeepOut } from './spec.ts';
import { stepBounds } from './step-bounds.ts';

/** What a whole arm, not one joint, has to keep whatever it does; the cap on its speed comes with each step. */
export interface ArmLimits {
  readonly keepOut: readonly KeepOut[];
}

/** Bits of what a state breaks. */
export const BREAKS = { endSpeed: 1, keepOut: 2, load: 4 } as const;

/**
 * Judges whether an arm can still brake inside every limit: a step is taken only if the whole braking path from its
 * end keeps them, and the braking path itself is then always there to fall back on (the reference-governor idea,
 * E. Gilbert, I. Kolmanovsky, Automatica 38 (2002) 2063-2073; from memory). The path is looked at in places, and what can
 * happen between two looks is bounded, so that it is kept there as well.
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
  const way = braking(joints, accelRadS2);
  const bounds = stepBounds(chain, joints);
  const fast = certifyEndSpeed(chain, way, bounds);
  const kept = limits.keepOut.length === 0 ? null : certifyKeepOuts(chain, way, bounds, limits.keepOut);
  const load = loads === null ? null : certifyLoad(way, bounds, loads, joints);
  const from = new Float64Array(joints).fill(Number.NaN);

  /** Opens the judgement of steps from x0: several are judged from one place. */
  const begin = (x0: Float64Array): void => {
    let same = true;
    for (let j = 0; j < joints; j++) if (from[j] !== x0[j]) same = false;
    if (same) return;
    from.set(x0);
    chain.pose(x0);
    fast.begin();
    kept?.begin();
    load?.begin(x0);
  };

  return {
    judge(x0, x, v, dtS, endSpeedMS, weigh) {
      begin(x0);
      if (fast.breaks(x0, x, v, dtS, endSpeedMS)) return BREAKS.endSpeed;
      if (kept?.breaks(x0, x, v)) return BREAKS.keepOut;
      if (weigh && load?.breaks(x0, x, v)) return BREAKS.load;
      return 0;
    },
  };
}
