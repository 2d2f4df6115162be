import { describe, expect, it } from 'vitest';
import { followedTip } from '../../src/check/followed-tip.ts';
import { resolutionOf } from '../../src/check/resolution.ts';
import { leaderSubject } from '../../src/check/subject.ts';
import type { FollowerSubject } from '../../src/check/subject.ts';
import { reaching } from '../../src/arm/reaching.ts';
import { edited, rigIn } from '../rig/memory.ts';
import { CRANE, CRANE_RIG } from './crane.ts';

const RAD = Math.PI / 180;

/** The crane with ranges of its own, following the tip of a leader of its own proportions at twice the size. */
function subject(shoulderDeg: readonly [number, number], elbowDeg: readonly [number, number]): FollowerSubject {
  const plain = edited(CRANE, ['from: { elbow: 1, shoulder: -0.5 }', 'from: elbow']);
  const { rig, profiles } = rigIn({ 'rig.yaml': CRANE_RIG, 'stork.yaml': plain });
  const [profile] = profiles.followers;
  const [spec] = rig.plan.followers;
  const leader = leaderSubject(profiles.leader);
  if (profile === undefined || spec?.whole === undefined || leader.arm === null) throw new Error('no arm');
  const ranges = [shoulderDeg, elbowDeg];
  const joints = spec.joints.map((joint, j) => {
    const [low, high] = ranges[j] ?? [0, 0];
    return { ...joint, minRad: low * RAD, maxRad: high * RAD };
  });
  const tip = {
    leader: leader.arm,
    scale: 2,
    originM: [0, 0, 0] as const,
    mirror: false,
    turnRad: 0,
    keepPitch: false,
    reaching: reaching(spec.whole.arm, joints),
  };
  return { profile, spec: { ...spec, joints, whole: { ...spec.whole, tip } }, leader };
}

describe('the share of the leader’s places that a tip follows to', () => {
  it('is all of them for an arm alike that turns as far', () => {
    // The leader: shoulder -120 to 120, elbow -85.5 to 85.5 degrees.
    const { tip_followed_share, tip_left_mm } = followedTip(subject([-130, 130], [-90, 90]));
    expect(tip_followed_share).toBe(1);
    expect(tip_left_mm).toBeLessThan(1);
  });

  it('is what its ranges leave', () => {
    // A shoulder that only turns forward, 0 to 120 of -120 to 120, reaches about half of them.
    const { tip_followed_share, tip_left_mm } = followedTip(subject([0, 120], [-90, 90]));
    expect(tip_followed_share).toBeGreaterThan(0.45);
    expect(tip_followed_share).toBeLessThan(0.8);
    // Somewhere the leader leans all the way back.
    expect(tip_left_mm).toBeGreaterThan(300);
  });

  it('is told with what a count moves, because no joint copies a pot', () => {
    const tip = subject([-130, 130], [-90, 90]);
    // The shoulder's pot: 120 degrees over 399 counts, 250 mm from the tip, twice as large.
    expect(followedTip(tip).tip_mm_per_count).toBeCloseTo((120 / 399) * RAD * 250 * 2, 6);
    expect(resolutionOf(tip, 0)).toMatchObject({ count_deg: null, noise_deg: null, wire_deg: expect.any(Number) });
  });

  it('is not told of a follower that copies joints', () => {
    const { profile, spec, leader } = subject([-130, 130], [-90, 90]);
    const { whole, ...joints } = spec;
    const none = { tip_followed_share: null, tip_left_mm: null, tip_mm_per_count: null };
    expect(followedTip({ profile, spec: joints, leader })).toEqual(none);
    expect(followedTip({ profile, spec, leader: null })).toEqual(none);
    expect(whole?.tip?.reaching).toEqual([0, 1]);
  });
});
