import { heat } from '../arm/heat.ts';
import { loads } from '../arm/load.ts';
import type { ArmSpec } from '../arm/spec.ts';

/** What an arm carries, and how warm carrying it makes its motors: told a few times a second, for show and for care. */
export interface Burden {
  /** Torque of each joint against what its motor may give, standing or moving; NaN where no motor is known. */
  readonly shares: Float64Array;
  /** Slow estimate of each motor's warmth, 0 to 1. A limp arm is not watched and keeps its warmth. */
  readonly warmth: Float64Array;
  /** elapsedS[0] seconds have passed with the arm about where it is now. */
  bear(anglesRad: Float64Array, moving: boolean, elapsedS: Float64Array): void;
}

/** Nothing about a load changes faster than an eye can read. */
const EVERY_S = 0.1;

/** @param joints how many the profile has */
export function burden(arm: ArmSpec, joints: number): Burden {
  const load = loads(arm, joints);
  const warm = heat(joints);
  const shares = new Float64Array(joints).fill(Number.NaN);
  const holding = new Float64Array(joints);
  const sinceS = new Float64Array([EVERY_S]);
  return {
    shares,
    warmth: warm.warmth,
    bear(anglesRad, moving, elapsedS) {
      sinceS[0] = (sinceS[0] as number) + (elapsedS[0] as number);
      if (sinceS[0] < EVERY_S) return;
      load.shares(anglesRad, true, holding);
      warm.step(holding, sinceS);
      if (moving) load.shares(anglesRad, false, shares);
      else shares.set(holding);
      sinceS[0] = 0;
    },
  };
}
