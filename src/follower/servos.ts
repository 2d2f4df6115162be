import type { ServoSpec } from './spec.ts';

/** Joint angles to servo pulses, through measured points, never beyond them. */
export interface Servos {
  /** pulsesUs[k] = map_k(sum_j weight_kj angle_j). */
  pulses(anglesRad: Float64Array, pulsesUs: Float64Array): void;
}

export function servos(specs: readonly ServoSpec[]): Servos {
  const n = specs.length;
  const turned = new Float64Array(n);
  return {
    pulses(anglesRad, pulsesUs) {
      for (let k = 0; k < n; k++) {
        const { turns, map } = specs[k] as ServoSpec;
        let sum = 0;
        for (let i = 0; i < turns.length; i++) {
          const turn = turns[i] as (typeof turns)[number];
          sum += turn.weight * (anglesRad[turn.joint] as number);
        }
        turned[k] = sum;
        map.apply(turned, k, pulsesUs, k);
      }
    },
  };
}
