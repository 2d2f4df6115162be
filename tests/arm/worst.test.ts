import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { worst } from '../../src/arm/worst.ts';
import { angles, builtArm, finite } from './arms.ts';
import { loads } from '../../src/arm/load.ts';

const ranges = (n: number, most: number) => ({
  minRad: new Float64Array(n).fill(-most),
  maxRad: new Float64Array(n).fill(most),
  joints: Array.from({ length: n }, (_, j) => j),
});

describe('the worst pose', () => {
  it('is found inside the ranges: two sums of cosines at their closed-form top', () => {
    // By hand: a cos(q1 - 0.3) + b cos(q1 + q2 - 0.9) is a + b at q1 = 0.3, q2 = 0.6.
    const found = worst(
      ranges(2, 2),
      ([q1, q2]) => 3 * Math.cos((q1 as number) - 0.3) + 2 * Math.cos((q1 as number) + (q2 as number) - 0.9),
    );
    expect(found.value).toBeCloseTo(5, 7);
    expect(found.poseRad[0]).toBeCloseTo(0.3, 3);
    expect(found.poseRad[1]).toBeCloseTo(0.6, 3);
  });

  it('is at an end where everything rises towards it', () => {
    const found = worst(ranges(3, 1), (pose) => pose.reduce((sum, angle) => sum + angle, 0));
    expect([...found.poseRad]).toEqual([1, 1, 1]);
  });

  it('is found where the grid’s best pose stands under a lower top', () => {
    // By hand: of the nine angles looked at, 0 is best with 1.3; of the top of 2 at 0.65 only the flank is looked at, 1.17 at
    // 0.75, so only a climb from there finds it, and only one that begins with small steps.
    const found = worst(ranges(1, 1), ([q]) => {
      const at = q as number;
      return Math.max(1.3 - at * at, 2 - Math.abs(at - 0.65) / 0.12);
    });
    expect(found.value).toBeCloseTo(2, 3);
    expect(found.poseRad[0]).toBeCloseTo(0.65, 4);
  });

  it('leaves the joints that are not varied in the middle of their range', () => {
    const found = worst({ minRad: [0, 0], maxRad: [1, 0.5], joints: [0] }, (pose) => pose[0] as number);
    expect([...found.poseRad]).toEqual([1, 0.25]);
  });

  it('takes what is not a number as lowest, and says so where nothing else is', () => {
    expect(worst(ranges(1, 1), ([q]) => ((q as number) > 0 ? Number.NaN : (q as number))).value).toBeCloseTo(0, 4);
    expect(worst(ranges(1, 1), () => Number.NaN).value).toBe(Number.NEGATIVE_INFINITY);
  });

  it('is not beaten by any pose tried at random, for the load of any arm', () => {
    fc.assert(
      fc.property(
        builtArm,
        finite(0.3, 2),
        fc.array(angles(6, 1), { minLength: 20, maxLength: 20 }),
        (bare, most, poses) => {
          const spec = { ...bare, links: bare.links.map((one) => ({ ...one, massKg: 1 })) };
          const n = spec.links.length;
          const torque = new Float64Array(n);
          const { torqueNm } = loads(spec, n);
          const score = (pose: Float64Array): number => {
            torqueNm(pose, torque);
            return Math.abs(torque[1] as number);
          };
          const found = worst(ranges(n, most), score);
          for (const pose of poses) {
            const tried = score(pose.subarray(0, n).map((angle) => angle * most));
            expect(found.value).toBeGreaterThanOrEqual(tried * (1 - 1e-6));
          }
        },
      ),
      { numRuns: 30 },
    );
  });
});
