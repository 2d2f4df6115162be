import { type Governor, governor } from '../../src/follower/governor.ts';
import { random } from '../../src/sim/random.ts';
import type { Accepted, MotionLimits } from '../motion-laws.ts';

/** What moves one joint towards a target: the governor, or something a test holds against it. */
export interface Mover {
  readonly x: number;
  readonly v: number;
  step(target: number, dtS: number): void;
}

export function governed(limits: MotionLimits): Mover & { readonly inside: Governor } {
  const inside = governor([{ accelRadS2: limits.accelRadS2, minRad: limits.minRad, maxRad: limits.maxRad }]);
  inside.speed[0] = limits.speedRadS;
  const dt = new Float64Array(1);
  return {
    inside,
    get x() {
      return inside.x[0] as number;
    },
    get v() {
      return inside.v[0] as number;
    },
    step(target, dtS) {
      inside.target[0] = target;
      dt[0] = dtS;
      inside.step(dt);
    },
  };
}

/** The usual recurrence: as fast as it could still brake, v = sqrt(2 A e). It is sampled, so it comes too late. */
export function squareRoot({ speedRadS, accelRadS2 }: MotionLimits): Mover {
  const self = {
    x: 0,
    v: 0,
    step(target: number, dtS: number) {
      const e = target - self.x;
      const wish = Math.sign(e) * Math.min(speedRadS, Math.sqrt(2 * accelRadS2 * Math.abs(e)));
      self.v += Math.min(Math.max(wish - self.v, -accelRadS2 * dtS), accelRadS2 * dtS);
      self.x += self.v * dtS;
    },
  };
  return self;
}

/** Keeps the speed limit only. */
export function jerky({ speedRadS }: MotionLimits): Mover {
  const self = {
    x: 0,
    v: 0,
    step(target: number, dtS: number) {
      const most = speedRadS * dtS;
      const step = Math.min(Math.max(target - self.x, -most), most);
      self.x += step;
      self.v = step / dtS;
    },
  };
  return self;
}

export interface Ride {
  readonly commands: Accepted[];
  /** When it stood at the target, seconds; Infinity: never. */
  readonly arrivedS: number;
  /** The longest step taken, seconds. */
  readonly tickS: number;
}

/** Steps of 20 ms jittered forty-fold, in whole microseconds: from 0.5 to 20 ms. */
const STEP_US = [500, 20_000] as const;
const STEPS_MAX = 100_000;

export function ride(mover: Mover, target: number, seed: number): Ride {
  const chance = random(seed, 0);
  const commands: Accepted[] = [{ tUs: 0, anglesRad: [mover.x] }];
  let tUs = 0;
  let tickS = 0;
  for (let i = 0; i < STEPS_MAX; i++) {
    const stepUs = Math.round(chance.between(...STEP_US));
    tUs += stepUs;
    tickS = Math.max(tickS, stepUs / 1e6);
    mover.step(target, stepUs / 1e6);
    commands.push({ tUs, anglesRad: [mover.x] });
    if (mover.x === target && mover.v === 0) return { commands, arrivedS: tUs / 1e6, tickS };
  }
  return { commands, arrivedS: Number.POSITIVE_INFINITY, tickS };
}
