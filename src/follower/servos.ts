import { packMaps } from '../map/pack.ts';
import { type Rows, rowsOf } from './rows.ts';
import type { FollowerSpec } from './spec.ts';
import { weightedSums } from './weighted.ts';

/** One arm's joint angles to servo pulses, through measured points, never beyond them. */
export interface Servos {
  /** What the last turn came to, microseconds. */
  readonly pulsesUs: Float64Array;
  /** pulsesUs[k] = map_k(sum_j weight_kj angle_j), of the angles as they are now. */
  turn(): void;
}

/** @param anglesRad of all joints, arm after arm */
export function servos(
  specs: readonly Pick<FollowerSpec, 'joints' | 'servos'>[],
  anglesRad: Float64Array,
): readonly Servos[] {
  const joints = rowsOf(specs.map((spec) => spec.joints.length));
  const maps = packMaps(specs.flatMap((spec) => spec.servos.map((servo) => servo.map)));
  const turns = weightedSums(
    specs.flatMap((spec, f) =>
      spec.servos.map((servo) => servo.turns.map((t) => ({ ...t, joint: t.joint + (joints[f] as Rows).from }))),
    ),
  );
  const turned = new Float64Array(1);
  const pulsesUs = new Float64Array(turns.rows);
  const turn = (rows: Rows): void => {
    for (let r = rows.from; r < rows.to; r++) {
      turned[0] = turns.sum(r, 0, anglesRad);
      maps.apply(r, turned, 0, pulsesUs, r);
    }
  };
  return rowsOf(specs.map((spec) => spec.servos.length)).map((rows) => ({
    pulsesUs: pulsesUs.subarray(rows.from, rows.to),
    turn: () => turn(rows),
  }));
}
