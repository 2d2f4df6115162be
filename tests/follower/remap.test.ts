import { describe, expect, it } from 'vitest';
import { remap } from '../../src/follower/remap.ts';
import type { FollowerJointSpec } from '../../src/follower/spec.ts';
import { DEG, followerJoint, followerSpec } from '../plans.ts';

/** What a follower of these joints is asked for at a leader pose, in degrees. */
function mixed(joints: readonly FollowerJointSpec[], leaderDeg: readonly number[]): number[] {
  const { mix, askedRad } = remap([followerSpec(joints)]);
  mix(
    { from: 0, to: joints.length },
    Float64Array.from(leaderDeg, (deg) => deg * DEG),
  );
  return [...askedRad].map((rad) => rad / DEG);
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
    remap([followerSpec(joints)]).mixSpeed({ from: 0, to: 3 }, Float64Array.of(3, 4), speeds);
    // By hand: -2 * 4; nothing; 0.5 * 3 + 0.25 * 4.
    expect([...speeds]).toEqual([-8, 0, 2.5]);
  });

  it("is each arm's own where several are made together", () => {
    const specs = [
      followerSpec([followerJoint(0, { gain: 2 }), followerJoint(null, { restRad: 1 })]),
      followerSpec([followerJoint(1, { gain: -3 })]),
    ];
    const { mix, askedRad } = remap(specs);
    mix({ from: 2, to: 3 }, Float64Array.of(5, 7));
    // By hand: -3 * 7; the other arm was not asked, and stays at rest.
    expect([...askedRad]).toEqual([0, 1, -21]);
    mix({ from: 0, to: 2 }, Float64Array.of(5, 7));
    // By hand: 2 * 5 and rest.
    expect([...askedRad]).toEqual([10, 1, -21]);
  });
});
