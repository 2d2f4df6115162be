import type { TargetEvent } from './events.ts';

/** Where `target` events last sent one follower: whoever leads by targets gives each arm angles of its own. */
export interface Aim {
  /** When; -Infinity before the first. */
  readonly atUs: number;
  /** In joint order, radians and rad/s. */
  readonly anglesRad: Float64Array;
  readonly speedsRadS: Float64Array;
  /** What is no number moves nothing. */
  take(event: TargetEvent): void;
  /** Somebody else leads: the arm stays where it is until told otherwise. */
  stay(anglesRad: Float64Array): void;
}

/** @param startRad where the arm is, radians */
export function aim(startRad: Float64Array): Aim {
  const anglesRad = startRad.slice();
  const speedsRadS = new Float64Array(startRad.length);
  const self = {
    atUs: Number.NEGATIVE_INFINITY,
    anglesRad,
    speedsRadS,
    take(event: TargetEvent): void {
      for (let j = 0; j < anglesRad.length; j++) {
        if (!Number.isFinite(event.anglesRad[j]) || !Number.isFinite(event.speedsRadS[j])) continue;
        anglesRad[j] = event.anglesRad[j] as number;
        speedsRadS[j] = event.speedsRadS[j] as number;
      }
      self.atUs = event.tUs;
    },
    stay(nowRad: Float64Array): void {
      anglesRad.set(nowRad);
      speedsRadS.fill(0);
    },
  };
  return self;
}
