import type { Motion } from './governor.ts';
import { LIMITS } from './reasons.ts';
import type { Rows } from './rows.ts';
import type { FollowerSpec } from './spec.ts';

/** What a step came to. Either throws where a joint has left its range: the governor never lets one, it is our bug. */
export interface Outcome {
  /** Adds to `limits` which joints run at their speed limit, and the bits of `reason` where one has not arrived. */
  note(rows: Rows, spec: FollowerSpec, reason: number): void;
  /** Only looks at the range. */
  check(rows: Rows, spec: FollowerSpec): void;
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
  const isOut = (r: number): boolean =>
    !((x[r] as number) >= (least[r] as number) && (x[r] as number) <= (most[r] as number));
  return {
    note(rows, spec, reason) {
      const { speed: running } = LIMITS;
      for (let r = rows.from; r < rows.to; r++) {
        if (isOut(r)) throw bug(spec, r - rows.from);
        if (reason !== 0 && x[r] !== target[r]) limits[r] = (limits[r] as number) | reason;
        const atLimit = v[r] !== 0 && Math.abs(v[r] as number) >= AT_LIMIT * (speed[r] as number);
        if (atLimit && braking[r] === 0) limits[r] = (limits[r] as number) | running;
      }
    },
    check(rows, spec) {
      for (let r = rows.from; r < rows.to; r++) if (isOut(r)) throw bug(spec, r - rows.from);
    },
  };
}

function bug({ name, joints }: FollowerSpec, j: number): RangeError {
  return new RangeError(`${name}: joint ${joints[j]?.name} left its range`);
}
