import { BREAKS, certificate } from '../arm/certificate.ts';
import { effort } from '../arm/effort.ts';
import { loads } from '../arm/load.ts';
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

export function wholeArm(spec: WholeArmSpec, motion: Governor): WholeArm {
  const n = motion.x.length;
  const load = spec.limitLoad ? loads(spec.arm, n) : null;
  const judge = certificate(spec.arm, n, motion.accel, spec, load).judge;
  const give = spec.limitAccel ? effort(spec.arm, n) : null;
  const gain = new Float64Array(n);
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

  /**
   * Speeds up only as hard as the motors can; a joint that brakes is left alone. The milder step lies between coasting
   * and the governor's, both short of where the joint would have to brake for its range.
   * @returns true when it was milder
   */
  const milder = (dtS: Float64Array, motors: NonNullable<typeof give>): boolean => {
    const dt = dtS[0] as number;
    for (let j = 0; j < n; j++) {
      const faster = Math.abs(motion.v[j] as number) > Math.abs(v0[j] as number);
      gain[j] = faster && dt > 0 ? ((motion.v[j] as number) - (v0[j] as number)) / dt : 0;
    }
    motors.share(x0, v0, gain, share);
    const s = share[0] as number;
    if (s >= 1) return false;
    for (let j = 0; j < n; j++) {
      if (gain[j] === 0) continue;
      const coast = (x0[j] as number) + (v0[j] as number) * dt;
      motion.x[j] = coast + s * ((motion.x[j] as number) - coast);
      motion.v[j] = (v0[j] as number) + s * ((motion.v[j] as number) - (v0[j] as number));
    }
    return true;
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
      const mild = give !== null && milder(dtS, give) ? LIMITS.load : 0;
      const broken = judge(x0, motion.x, motion.v, dtS, cap, weigh);
      if (broken === 0) return mild;
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
