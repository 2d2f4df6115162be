import type { Motion } from './governor.ts';
import { LIMITS } from './reasons.ts';
import type { Rows } from './rows.ts';
import type { FollowerSpec } from './spec.ts';

/** What a step came to. */
export interface Outcome {
  /** Throws where a joint has left its range: the governor never lets one, so it is a bug of ours. */
  check(rows: Rows, spec: FollowerSpec): void;
  /** Adds to `limits` which joints run at their speed limit, and the bit `reason` where one has not arrived. */
  note(rows: Rows, reason: number): void;
}

/** A command this far outside its range is a bug of ours, not rounding, radians. */
const ROUNDING_RAD = 1e-9;
/** A joint counts as moving at its limit from this share of it on. */
const AT_LIMIT = 0.999;

/** @param limits bits of `LIMITS` of every joint, arm after arm, as `motion` */
export function outcome(specs: readonly FollowerSpec[], motion: Motion, limits: Uint8Array): Outcome {
  const joints = specs.flatMap((spec) => spec.joints);
  const least = Float64Array.from(joints, (j) => j.minRad - ROUNDING_RAD);
  const most = Float64Array.from(joints, (j) => j.maxRad + ROUNDING_RAD);
  const { x, v, speed, target, braking } = motion;
  return {
    check({ from, to }, { name, joints: own }) {
      for (let r = from; r < to; r++) {
        const at = x[r] as number;
        const inside = at >= (least[r] as number) && at <= (most[r] as number);
        if (!inside) throw new RangeError(`${name}: joint ${own[r - from]?.name} left its range`);
      }
    },
    note({ from, to }, reason) {
      const { speed: running } = LIMITS;
      for (let r = from; r < to; r++) {
        if (reason !== 0 && x[r] !== target[r]) limits[r] = (limits[r] as number) | reason;
        const atLimit = v[r] !== 0 && Math.abs(v[r] as number) >= AT_LIMIT * (speed[r] as number);
        if (atLimit && braking[r] === 0) limits[r] = (limits[r] as number) | running;
      }
    },
  };
}
