import type { Motion } from './governor.ts';
import type { Rows } from './rows.ts';
import type { FollowerSpec } from './spec.ts';

/** Sets the speed limits in force. */
export interface SpeedLimits {
  /** The same share of every joint's limit. */
  open(rows: Rows, share: Float64Array): void;
  /** At most `share` of it, and joints that have less far to go slow down so that all arrive together. */
  together(rows: Rows, share: Float64Array): void;
}

/** A joint this close to its target hardly needs a share of the speed, radians. */
const CLOSE_RAD = 1e-6;

/**
 * @param motion every joint, arm after arm
 * @param held 1 for each joint that others need not wait for
 */
export function speedLimits(specs: readonly FollowerSpec[], motion: Motion, held: Uint8Array): SpeedLimits {
  const top = Float64Array.from(
    specs.flatMap((spec) => spec.joints),
    (j) => j.speedRadS,
  );
  const { x, target, speed } = motion;
  return {
    open({ from, to }, share) {
      const s = share[0] as number;
      for (let r = from; r < to; r++) speed[r] = s * (top[r] as number);
    },
    together({ from, to }, share) {
      const s = share[0] as number;
      let longestS = 0;
      for (let r = from; r < to; r++) {
        const away = Math.abs((target[r] as number) - (x[r] as number));
        if (held[r] === 0) longestS = Math.max(longestS, away / (top[r] as number));
      }
      for (let r = from; r < to; r++) {
        const away = Math.abs((target[r] as number) - (x[r] as number)) + CLOSE_RAD;
        speed[r] = s * (longestS > 0 ? Math.min(top[r] as number, away / longestS) : (top[r] as number));
      }
    },
  };
}
