import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { governors } from '../../src/follower/governor.ts';
import { LIMITS } from '../../src/follower/reasons.ts';
import type { FollowerJointSpec } from '../../src/follower/spec.ts';
import { wish } from '../../src/follower/wish.ts';
import { DEG, followerJoint, followerSpec } from '../plans.ts';

/** The targets of one joint in a row as it is asked for `inputs`, all in degrees. */
function settled(
  joint: FollowerJointSpec,
  inputs: readonly number[],
  from = 0,
): { target: number; clipped: boolean }[] {
  const { all } = governors([[joint]]);
  const asked = new Float64Array(1);
  const { settle, limits } = wish([followerSpec([joint])], all, asked);
  all.target[0] = from * DEG;
  return inputs.map((input) => {
    asked[0] = input * DEG;
    settle({ from: 0, to: 1 }, false);
    return { target: (all.target[0] as number) / DEG, clipped: ((limits[0] as number) & LIMITS.range) !== 0 };
  });
}

describe('the deadband', () => {
  it('lets the target stand while the input stays within it, and trail behind it past that', () => {
    const targets = settled(followerJoint(0, { deadbandRad: 2 * DEG }), [1, 2, 3, 5, 4, 3, 1, 0]).map((s) => s.target);
    // By hand: nothing up to 2; then input - 2; on the way back nothing down to 3 - 2; then input + 2.
    [0, 0, 1, 3, 3, 3, 3, 2].forEach((expected, i) => expect(targets[i]).toBeCloseTo(expected, 12));
  });

  it('never steps: the target moves at most as far as the input and trails it by at most the deadband', () => {
    const angle = fc.double({ min: -60, max: 60, noNaN: true });
    fc.assert(
      fc.property(
        fc.array(angle, { minLength: 2, maxLength: 60 }),
        fc.double({ min: 0, max: 5, noNaN: true }),
        (inputs, d) => {
          const targets = settled(followerJoint(0, { deadbandRad: d * DEG }), inputs, inputs[0]);
          for (let i = 0; i < inputs.length; i++) {
            const { target } = targets[i] as { target: number };
            expect(Math.abs(target - (inputs[i] as number))).toBeLessThanOrEqual(d + 1e-9);
            if (i === 0) continue;
            const moved = Math.abs(target - (targets[i - 1] as { target: number }).target);
            expect(moved).toBeLessThanOrEqual(Math.abs((inputs[i] as number) - (inputs[i - 1] as number)) + 1e-9);
          }
        },
      ),
    );
  });
});

describe('the range', () => {
  it('cuts what is asked for, and says so', () => {
    const joint = followerJoint(0, { minRad: -30 * DEG, maxRad: 45 * DEG });
    const said = settled(joint, [44, 50, -31, 0]);
    [44, 45, -30, 0].forEach((expected, i) => expect(said[i]?.target).toBeCloseTo(expected, 12));
    expect(said.map((s) => s.clipped)).toEqual([false, true, true, false]);
  });

  it('holds for any input, and comes after the deadband', () => {
    const joint = followerJoint(0, { minRad: -30 * DEG, maxRad: 45 * DEG, deadbandRad: 3 * DEG });
    const inputs = fc.array(fc.double({ min: -1e6, max: 1e6, noNaN: true }), { minLength: 1, maxLength: 40 });
    fc.assert(
      fc.property(inputs, (asked) => {
        for (const { target } of settled(joint, asked)) {
          expect(target).toBeGreaterThanOrEqual(-30 - 1e-9);
          expect(target).toBeLessThanOrEqual(45 + 1e-9);
        }
      }),
    );
    // By hand: 47 trails at 44 inside the range although 47 is outside.
    expect(settled(joint, [47])[0]).toEqual({ target: expect.closeTo(44, 12), clipped: false });
  });
});

describe('the wishes of several arms', () => {
  it('are settled one arm at a time, joint by joint in its own rows', () => {
    const specs = [followerSpec([followerJoint(0), followerJoint(1)]), followerSpec([followerJoint(0)])];
    const { all } = governors(specs.map((spec) => spec.joints));
    const { settle, wantedRad } = wish(specs, all, Float64Array.of(20 * DEG, 20 * DEG, 10 * DEG));
    settle({ from: 2, to: 3 }, false);
    expect([...all.target]).toEqual([0, 0, 10 * DEG]);
    expect([...wantedRad]).toEqual([0, 0, 10 * DEG]);
  });

  it('stand still, and brake the joints that are held', () => {
    const spec = followerSpec([followerJoint(0), followerJoint(1)]);
    const { all } = governors([spec.joints]);
    const { settle, held, limits } = wish([spec], all, Float64Array.of(10 * DEG, 10 * DEG));
    all.targetSpeed.fill(3);
    held[1] = 1;
    settle({ from: 0, to: 2 }, false);
    expect([...all.targetSpeed]).toEqual([0, 0]);
    expect([...all.braking]).toEqual([0, 1]);
    expect([...all.target]).toEqual([10 * DEG, 0]);
    expect(limits[1]).toBe(LIMITS.sick);
  });
});
