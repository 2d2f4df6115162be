import { BREAKS, certificate, type LoadShares } from '../arm/certificate.ts';
import type { Governor } from './governor.ts';
import { LIMITS } from './reasons.ts';
import type { WholeArmSpec } from './spec.ts';

/** Steps the governor so that the arm as a whole, too, can always brake inside its limits. */
export interface WholeArm {
  /**
   * One governed step of dtS[0] seconds; what the certificate refuses is cut back towards braking.
   * @param gentle link ends no faster than 250 mm/s, for motions that no hand is leading
   * @param weigh refuse what overloads a joint, if the profile limits load
   * @returns bit of `LIMITS` for what held the arm back; 0 for nothing
   */
  step(dtS: Float64Array, gentle: boolean, weigh: boolean): number;
}

/** Reduced speed of ISO 10218-1:2025, 5.5.3 (as quoted by gt-engineering.it): a borrowed figure, no claim of conformity. */
const GENTLE_MS = 0.25;
/** A refused step is found again to 1/64 of itself. */
const HALVINGS = 6;
/** When less than this is left of a step, joints are tried one by one: the base may turn while the floor stops the shoulder. */
const FREEING_SHARE = 0.25;

const REASON: Readonly<Record<number, number>> = {
  [BREAKS.endSpeed]: LIMITS.end_speed,
  [BREAKS.keepOut]: LIMITS.keep_out,
  [BREAKS.load]: LIMITS.load,
};

/** @param loads torque shares of a pose, where the profile limits load; null: loads are only told */
export function wholeArm(spec: WholeArmSpec, motion: Governor, loads: LoadShares | null): WholeArm {
  const n = motion.x.length;
  const judge = certificate(spec.arm, n, motion.accel, spec, loads).judge;
  const cap = new Float64Array(1);
  const x0 = new Float64Array(n);
  const v0 = new Float64Array(n);
  const far = { x: new Float64Array(n), v: new Float64Array(n) };
  const stop = { x: new Float64Array(n), v: new Float64Array(n) };
  const asked = new Uint8Array(n);
  const share = new Float64Array(1);

  const keep = (to: { x: Float64Array; v: Float64Array }): void => {
    to.x.set(motion.x);
    to.v.set(motion.v);
  };

  /** Between braking (0) and the whole step (1): a mean of two motions that keep every joint's limits keeps them too. */
  const mix = (): void => {
    const s = share[0] as number;
    for (let j = 0; j < n; j++) {
      motion.x[j] = (stop.x[j] as number) + s * ((far.x[j] as number) - (stop.x[j] as number));
      motion.v[j] = (stop.v[j] as number) + s * ((far.v[j] as number) - (stop.v[j] as number));
    }
  };

  const freeOthers = (dtS: Float64Array, weigh: boolean): void => {
    for (let j = 0; j < n; j++) {
      const x = motion.x[j] as number;
      const v = motion.v[j] as number;
      motion.x[j] = far.x[j] as number;
      motion.v[j] = far.v[j] as number;
      if (judge(x0, motion.x, motion.v, dtS, cap, weigh) === 0) continue;
      motion.x[j] = x;
      motion.v[j] = v;
    }
  };

  const brake = (dtS: Float64Array): void => {
    motion.x.set(x0);
    motion.v.set(v0);
    asked.set(motion.braking);
    motion.braking.fill(1);
    motion.step(dtS);
    motion.braking.set(asked);
  };

  return {
    step(dtS, gentle, weigh) {
      cap[0] = Math.min(spec.endSpeedMS ?? Number.POSITIVE_INFINITY, gentle ? GENTLE_MS : Number.POSITIVE_INFINITY);
      x0.set(motion.x);
      v0.set(motion.v);
      motion.step(dtS);
      const broken = judge(x0, motion.x, motion.v, dtS, cap, weigh);
      if (broken === 0) return 0;
      keep(far);
      brake(dtS);
      keep(stop);
      let low = 0;
      let high = 1;
      for (let halving = 0; halving < HALVINGS; halving++) {
        share[0] = 0.5 * (low + high);
        mix();
        if (judge(x0, motion.x, motion.v, dtS, cap, weigh) === 0) low = share[0];
        else high = share[0];
      }
      share[0] = low;
      mix();
      if (low < FREEING_SHARE) freeOthers(dtS, weigh);
      return REASON[broken] as number;
    },
  };
}
