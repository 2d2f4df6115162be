import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { remap } from '../../src/follower/remap.ts';
import type { FollowerJointSpec } from '../../src/follower/spec.ts';
import { DEG, followerJoint, followerSpec } from '../plans.ts';

/** What a follower of these joints is asked for at a leader pose, in degrees. */
function mixed(joints: readonly FollowerJointSpec[], leaderDeg: readonly number[]): number[] {
  const wanted = new Float64Array(joints.length);
  remap(followerSpec(joints)).mix(
    Float64Array.from(leaderDeg, (deg) => deg * DEG),
    wanted,
  );
  return [...wanted].map((rad) => rad / DEG);
}

describe('the remap of a joint', () => {
  it('is gain times the weighted sum of its sources, plus its offset', () => {
    // By hand: -1.5 (1 * 40 - 0.5 * 20) + 12 = -33.
    const joint = followerJoint(0, {
      sources: [
        { joint: 0, weight: 1 },
        { joint: 2, weight: -0.5 },
      ],
      gain: -1.5,
      offsetRad: 12 * DEG,
    });
    expect(mixed([joint], [40, 999, 20])[0]).toBeCloseTo(-33, 12);
  });

  it('is its rest angle where it has no source, whatever its offset says', () => {
    expect(mixed([followerJoint(null, { restRad: -20 * DEG, offsetRad: 5 * DEG })], [40])[0]).toBeCloseTo(-20, 12);
  });

  it('has the speeds of its sources without the offset, and stands without a source', () => {
    const joints = [
      followerJoint(1, { gain: -2, offsetRad: 1 }),
      followerJoint(null, { restRad: 1 }),
      followerJoint(0, {
        sources: [
          { joint: 0, weight: 0.5 },
          { joint: 1, weight: 0.25 },
        ],
      }),
    ];
    const speeds = new Float64Array(3).fill(9);
    remap(followerSpec(joints)).mixSpeed(Float64Array.of(3, 4), speeds);
    // By hand: -2 * 4; nothing; 0.5 * 3 + 0.25 * 4.
    expect([...speeds]).toEqual([-8, 0, 2.5]);
  });
});

/** The targets of one joint in a row as it is asked for `inputs`, all in degrees. */
function settled(
  joint: FollowerJointSpec,
  inputs: readonly number[],
  from = 0,
): { target: number; clipped: boolean }[] {
  const map = remap(followerSpec([joint]));
  const target = Float64Array.of(from * DEG);
  const clipped = new Uint8Array(1);
  return inputs.map((input) => {
    map.settle(Float64Array.of(input * DEG), target, clipped);
    return { target: (target[0] as number) / DEG, clipped: clipped[0] === 1 };
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
