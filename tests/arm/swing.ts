import type { LinkInertia } from '../../src/arm/bodies.ts';
import { pointMasses } from '../../src/arm/bodies.ts';
import { chain, timesInto } from '../../src/arm/chain.ts';
import { dynamics } from '../../src/arm/dynamics.ts';
import { passive } from '../../src/arm/passive.ts';
import type { ArmSpec } from '../../src/arm/spec.ts';

/** An arm without motors, moved by its own weight: its inverse dynamics turned round. */

export interface Swinging {
  readonly q: Float64Array;
  readonly v: Float64Array;
}

/** Solves m x = b by Gauss's elimination with pivots; changes both. */
function solved(m: Float64Array[], b: Float64Array): Float64Array {
  const n = b.length;
  for (let c = 0; c < n; c++) {
    let pivot = c;
    for (let r = c; r < n; r++) if (Math.abs(m[r]?.[c] as number) > Math.abs(m[pivot]?.[c] as number)) pivot = r;
    [m[c], m[pivot]] = [m[pivot] as Float64Array, m[c] as Float64Array];
    [b[c], b[pivot]] = [b[pivot] as number, b[c] as number];
    for (let r = 0; r < n; r++) {
      if (r === c) continue;
      const share = (m[r]?.[c] as number) / (m[c]?.[c] as number);
      for (let k = c; k < n; k++) (m[r] as Float64Array)[k] = (m[r]?.[k] as number) - share * (m[c]?.[k] as number);
      b[r] = (b[r] as number) - share * (b[c] as number);
    }
  }
  return b.map((value, c) => value / (m[c]?.[c] as number));
}

function accelerations(
  spec: ArmSpec,
  inertia?: readonly LinkInertia[],
): (q: Float64Array, v: Float64Array) => Float64Array {
  const { torqueNm, inertialNm } = dynamics(spec, inertia === undefined ? {} : { inertia });
  return (q, v) => {
    const n = q.length;
    const needed = new Float64Array(n);
    torqueNm(q, v, new Float64Array(n), needed);
    const rows = Array.from({ length: n }, (_, c) => {
      const row = new Float64Array(n);
      inertialNm(
        q,
        Float64Array.from({ length: n }, (_value, j) => (j === c ? 1 : 0)),
        row,
      );
      return row;
    });
    return solved(
      rows,
      needed.map((value) => -value),
    );
  };
}

/** Steps of Runge and Kutta's fourth order. */
export function swing(
  spec: ArmSpec,
  state: Swinging,
  dtS: number,
  steps: number,
  inertia?: readonly LinkInertia[],
): void {
  const { q, v } = state;
  const accel = accelerations(spec, inertia);
  const ahead = (a: Float64Array, b: Float64Array, by: number): Float64Array =>
    a.map((value, j) => value + by * (b[j] as number));
  for (let step = 0; step < steps; step++) {
    const a1 = accel(q, v);
    const v2 = ahead(v, a1, dtS / 2);
    const a2 = accel(ahead(q, v, dtS / 2), v2);
    const v3 = ahead(v, a2, dtS / 2);
    const a3 = accel(ahead(q, v2, dtS / 2), v3);
    const v4 = ahead(v, a3, dtS);
    const a4 = accel(ahead(q, v3, dtS), v4);
    for (let j = 0; j < q.length; j++) {
      const sum = (k1: number, k2: number, k3: number, k4: number): number => ((k1 + 2 * k2 + 2 * k3 + k4) * dtS) / 6;
      q[j] = (q[j] as number) + sum(v[j] as number, v2[j] as number, v3[j] as number, v4[j] as number);
      v[j] = (v[j] as number) + sum(a1[j] as number, a2[j] as number, a3[j] as number, a4[j] as number);
    }
  }
}

/** Energy of motion, of height and in springs, joules. */
export function energyOf(spec: ArmSpec, q: Float64Array, v: Float64Array): number {
  const momentum = new Float64Array(q.length);
  dynamics(spec).inertialNm(q, v, momentum);
  const motion = 0.5 * momentum.reduce((sum, value, j) => sum + value * (v[j] as number), 0);
  const poser = chain(spec);
  poser.pose(q);
  const height = pointMasses(spec).reduce((sum, { link, massKg, atM }) => {
    const place = new Float64Array(3);
    timesInto(poser.turn, 9 * link, Float64Array.from(atM), 0, place, 0);
    return sum + massKg * 9.80665 * ((poser.at[3 * link + 2] as number) + (place[2] as number));
  }, 0);
  return motion + height + passive(spec).energyJ(q);
}
