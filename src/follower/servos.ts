import { packMaps } from '../map/pack.ts';
import { type Rows, rowsOf } from './rows.ts';
import type { ServoSpec } from './spec.ts';
import { weightedSums } from './weighted.ts';

/** One arm's joint angles to servo pulses, through measured points, never beyond them. */
export interface Servos {
  /** pulsesUs[k] = map_k(sum_j weight_kj angle_j). */
  pulses(anglesRad: Float64Array, pulsesUs: Float64Array): void;
}

/** @param arms the servos of each arm */
export function servos(arms: readonly (readonly ServoSpec[])[]): readonly Servos[] {
  const all = arms.flat();
  const maps = packMaps(all.map((servo) => servo.map));
  const { first, from, weight } = weightedSums(all.map((servo) => servo.turns));
  const turned = new Float64Array(1);
  const turn = (rows: Rows, anglesRad: Float64Array, pulsesUs: Float64Array): void => {
    for (let r = rows.from; r < rows.to; r++) {
      let sum = 0;
      for (let t = first[r] as number; t < (first[r + 1] as number); t++)
        sum += (weight[t] as number) * (anglesRad[from[t] as number] as number);
      turned[0] = sum;
      maps.apply(r, turned, 0, pulsesUs, r - rows.from);
    }
  };
  return rowsOf(arms.map((arm) => arm.length)).map((rows) => ({
    pulses: (anglesRad, pulsesUs) => turn(rows, anglesRad, pulsesUs),
  }));
}
