import type { ArmSpec } from '../arm/spec.ts';
import type { FollowerProfile } from '../rig/schema/follower.ts';
import type { JointLoad } from './load.ts';

/**
 * What the servos draw, amperes; null where no motor's current is known. A current is taken as proportional to its torque,
 * and as the stall current for the moment in which a motor starts (common practice, no source).
 */
export interface Supply {
  /** Servos started one after another: one starts while all the others hold their worst load. */
  readonly supply_one_by_one_a: number | null;
  /** All joints under their worst moving load at once. */
  readonly supply_moving_a: number | null;
  /** All joining at once: every servo starting, or blocked, in one moment. */
  readonly supply_worst_a: number | null;
  /** What the supply can give. */
  readonly supply_a: number | null;
  /** Joints that these sums leave out, because no current of theirs is known. */
  readonly supply_not_counted: readonly string[];
}

export function supplyOf(profile: FollowerProfile, arm: ArmSpec | null, loads: readonly JointLoad[]): Supply {
  const joints = profile.joints.map(({ name }, j) => {
    const motor = arm?.links.find(({ joint }) => joint === j)?.motor ?? null;
    return { name, motor, stallA: motor?.stallA ?? null, load: loads[j] as JointLoad };
  });
  const known = joints.flatMap(({ motor, stallA, load }) =>
    motor === null || stallA === null ? [] : [{ stallA, stallNm: motor.stallNm, load }],
  );
  const supply_a = profile.supply?.amps ?? null;
  const supply_not_counted = joints.filter(({ stallA }) => stallA === null).map(({ name }) => name);
  if (known.length === 0)
    return { supply_one_by_one_a: null, supply_moving_a: null, supply_worst_a: null, supply_a, supply_not_counted };
  // A motor whose load is not known may stall.
  const under = (nm: number | null, { stallA, stallNm }: (typeof known)[number]): number =>
    stallA * Math.min(1, (nm ?? stallNm) / stallNm);
  const holding = known.map((one) => under(one.load.load_worst_nm, one));
  const held = sum(holding);
  return {
    supply_one_by_one_a: Math.max(...known.map(({ stallA }, i) => held - (holding[i] as number) + stallA)),
    supply_moving_a: sum(known.map((one) => under(one.load.moving_worst_nm, one))),
    supply_worst_a: sum(known.map(({ stallA }) => stallA)),
    supply_a,
    supply_not_counted,
  };
}

function sum(values: readonly number[]): number {
  return values.reduce((total, value) => total + value, 0);
}
