import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { braking } from '../../src/arm/braking.ts';
import { governor } from '../../src/follower/governor.ts';
import { finite } from './arms.ts';

/** Speeds in thousandths: the smallest of them still take some time to stop. */
const speed = fc.integer({ min: -4000, max: 4000 }).map((thousandths) => thousandths / 1000);
const joint = fc.record({ x: finite(-2, 2), v: speed, accelRadS2: finite(0.5, 30) });
const joints = fc.array(joint, { minLength: 1, maxLength: 8 });

describe('the way on which an arm comes to a stand', () => {
  it('is the one on which the governor brakes', () => {
    fc.assert(
      fc.property(joints, fc.array(finite(0.001, 0.1), { minLength: 1, maxLength: 20 }), (list, dts) => {
        const motion = governor(list.map(({ accelRadS2 }) => ({ accelRadS2, minRad: -99, maxRad: 99 })));
        motion.x.set(list.map(({ x }) => x));
        motion.v.set(list.map(({ v }) => v));
        motion.braking.fill(1);
        const stand = new Float64Array(list.length);
        const way = braking(list.length, motion.accel);
        way.stand(motion.x, motion.v, stand);
        const dt = new Float64Array(1);
        for (const seconds of [...dts, 10, 1]) {
          dt[0] = seconds;
          motion.step(dt);
        }
        for (const [j, angle] of stand.entries()) expect(motion.x[j]).toBeCloseTo(angle, 9);
      }),
    );
  });

  it('is cut where a joint comes to a stand, begins where it begins and ends standing', () => {
    fc.assert(
      fc.property(joints, (list) => {
        const n = list.length;
        const way = braking(
          n,
          Float64Array.from(list, ({ accelRadS2 }) => accelRadS2),
        );
        const x = Float64Array.from(list, (one) => one.x);
        const v = Float64Array.from(list, (one) => one.v);
        const stand = new Float64Array(n);
        way.stand(x, v, stand);
        way.plan(x, v);
        way.look(0);
        for (let j = 0; j < n; j++) {
          expect(way.at[j]).toBeCloseTo(x[j] as number, 12);
          expect(way.speed[j]).toBeCloseTo(v[j] as number, 12);
        }
        const times = [...way.timeS.subarray(0, way.pieces + 1)];
        expect(times).toEqual([...times].sort((a, b) => a - b));
        for (const { v: from, accelRadS2 } of list) {
          const stop = Math.abs(from) / accelRadS2;
          expect(Math.min(...times.map((t) => Math.abs(t - stop)))).toBeLessThan(2e-9);
        }
        way.look(way.pieces);
        for (let j = 0; j < n; j++) {
          expect(way.at[j]).toBeCloseTo(stand[j] as number, 9);
          expect(Math.abs(way.speed[j] as number)).toBeLessThan(1e-6);
        }
        // At most 12 pieces for the whole turn and one more a joint.
        expect(way.pieces).toBeLessThanOrEqual(12 + n);
      }),
    );
  });

  it('of an arm that stands has no pieces', () => {
    const way = braking(2, Float64Array.of(5, 5));
    way.plan(Float64Array.of(1, 2), Float64Array.of(0, 0));
    expect(way.pieces).toBe(0);
  });
});
