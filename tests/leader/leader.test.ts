import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { leader } from '../../src/leader/leader.ts';
import { button, countsAt, DEG, leaderJoint, leaderSpec, MS, PRESSED, RELEASED } from '../plans.ts';

describe('the leader kernel', () => {
  it('reads each joint and each button from its own input', () => {
    const spec = leaderSpec(2, { joints: [leaderJoint(2), leaderJoint(0)], buttons: [button(1, 'hold')] });
    const kernel = leader(spec);
    kernel.take(0, Float64Array.of(countsAt(10), PRESSED, countsAt(20)));
    expect(kernel.poseRad[0]).toBeCloseTo(20 * DEG, 12);
    expect(kernel.poseRad[1]).toBeCloseTo(10 * DEG, 12);
    expect(kernel.buttons.down[0]).toBe(1);
    kernel.take(10 * MS, Float64Array.of(countsAt(10), RELEASED, countsAt(20)));
    kernel.take(20 * MS, Float64Array.of(countsAt(10), RELEASED, countsAt(20)));
    expect(kernel.buttons.down[0]).toBe(0);
  });

  it('takes the spikes out before it smooths', () => {
    const smooth = { cutoffHz: 1, betaHzPerRadS: 0, slopeCutoffHz: 1 };
    const kernel = leader(leaderSpec(1, { joints: [leaderJoint(0, { despike: 3, smooth })] }));
    const angles = [10, 10, 100, 10, 10, 10].map((angle, i) => {
      kernel.take(i * 10 * MS, Float64Array.of(countsAt(angle)));
      return (kernel.poseRad[0] as number) / DEG;
    });
    for (const angle of angles) expect(angle).toBeCloseTo(10, 10);
  });

  it('never says an angle that is no number once it has said one, nor one beyond what its travel allows', () => {
    const counts = fc.oneof(
      { weight: 6, arbitrary: fc.double({ min: 112, max: 912, noNaN: true }) },
      fc.constantFrom(0, 1023, Number.NaN, Infinity, -Infinity, 1e300, -5, 2000),
    );
    const steps = fc.oneof(fc.integer({ min: 0, max: 30_000 }), fc.constantFrom(0, 300_000, 2_000_000));
    const smooth = fc.constantFrom(null, { cutoffHz: 1.5, betaHzPerRadS: 4, slopeCutoffHz: 1 });
    fc.assert(
      fc.property(
        fc.array(fc.tuple(steps, counts), { maxLength: 60 }),
        smooth,
        fc.constantFrom(1, 3, 5),
        (readings, filter, window) => {
          const kernel = leader(leaderSpec(1, { joints: [leaderJoint(0, { despike: window, smooth: filter })] }));
          // By hand: 5 % of 800 counts past either end are 12 degrees past 120.
          const mostRad = 132 * DEG * (1 + 1e-12);
          let nowUs = 0;
          let said = false;
          for (const [afterUs, value] of readings) {
            nowUs += afterUs;
            const before = kernel.poseRad[0] as number;
            kernel.take(nowUs, Float64Array.of(value));
            const angle = kernel.poseRad[0] as number;
            said ||= Number.isFinite(angle);
            expect(said ? Math.abs(angle) <= mostRad : Number.isNaN(angle)).toBe(true);
            const trusted = kernel.health.state[0] === 0 && kernel.health.suspect[0] === 0;
            expect(trusted || Object.is(angle, before)).toBe(true);
          }
        },
      ),
    );
  });
});
