import { packMaps } from '../map/pack.ts';
import { type Rows, rowsOf } from './rows.ts';
import type { FollowerSpec } from './spec.ts';
import { weightedSums } from './weighted.ts';

/** Joint angles to servo pulses, through measured points, never beyond them. */
export interface Servos {
  /** What the last turns came to, microseconds, arm after arm. */
  readonly pulsesUs: Float64Array;
  /** pulsesUs[k] = map_k(sum_j weight_kj angle_j), of the angles as they are now; `rows` are servos. */
  turn(rows: Rows): void;
}

/** @param anglesRad of all joints, arm after arm */
export function servos(specs: readonly Pick<FollowerSpec, 'joints' | 'servos'>[], anglesRad: Float64Array): Servos {
  const joints = rowsOf(specs.map((spec) => spec.joints.length));
  const maps = packMaps(specs.flatMap((spec) => spec.servos.map((servo) => servo.map)));
  const turns = weightedSums(
    specs.flatMap((spec, f) =>
      spec.servos.map((servo) => servo.turns.map((t) => ({ ...t, joint: t.joint + (joints[f] as Rows).from }))),
    ),
  );
  const turned = new Float64Array(1);
  const pulsesUs = new Float64Array(turns.rows);
  return {
    pulsesUs,
    turn({ from, to }) {
      for (let r = from; r < to; r++) {
        turned[0] = turns.sum(r, 0, anglesRad);
        maps.apply(r, turned, 0, pulsesUs, r);
      }
    },
  };
}
