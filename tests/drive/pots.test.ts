import { describe, expect, it } from 'vitest';
import { motionFaults } from '../motion-laws.ts';
import { DEG, followerJoint, followerSpec, leaderSpec, MS, planOf, S } from '../plans.ts';
import { Rehearsal } from './rehearsal.ts';

/** Readings in which pot 1 is at a rail and pot 0 at an angle. */
function railed(on: Rehearsal, forUs: number, angleDeg: number): void {
  for (let us = 0; us < forUs; us += 10 * MS)
    on.pose(angleDeg)
      .input(1, RAIL)
      .reads()
      .run(10 * MS);
}

/** Joint 0 is fed by pot 0, joint 1 by both, joint 2 by pot 1. */
const joints = [
  followerJoint(0),
  followerJoint(0, {
    sources: [
      { joint: 0, weight: 0.5 },
      { joint: 1, weight: 0.5 },
    ],
  }),
  followerJoint(1),
];
const plan = planOf([followerSpec(joints)], { leader: leaderSpec(2) });
const RAIL = 0;

describe('a sick pot', () => {
  it('holds every joint that it feeds, and no other', () => {
    const on = new Rehearsal(plan).following().plays(2 * S, () => [10, 10]);
    railed(on, 0.2 * S, 10);
    railed(on, 2 * S, 30);
    expect(on.state()).toBe('following');
    expect(on.anglesDeg()).toEqual([expect.closeTo(30, 6), expect.closeTo(10, 6), expect.closeTo(10, 6)]);
    expect([...on.stage().arm.held]).toEqual([0, 1, 1]);
    expect(
      motionFaults(
        on.commands().filter((told) => told.pulsing === 3),
        joints,
      ),
    ).toEqual([]);
  });

  it('that heals is joined again, gently', () => {
    const on = new Rehearsal(plan).following().plays(2 * S, () => [10, 10]);
    railed(on, S, 10);
    on.plays(990 * MS, () => [10, 60]);
    expect([on.state(), on.anglesDeg()[2]]).toEqual(['following', expect.closeTo(10, 6)]);
    on.plays(50 * MS, () => [10, 60]);
    expect(on.state()).toBe('joining');
    on.plays(S, () => [10, 60]);
    expect(Math.max(...on.speedsDegS().map(Math.abs))).toBeCloseTo(15, 3);
    on.plays(5 * S, () => [10, 60]);
    expect([on.state(), on.anglesDeg()[2]]).toEqual(['following', expect.closeTo(60, 6)]);
    expect(
      motionFaults(
        on.commands().filter((told) => told.pulsing === 3),
        joints,
      ),
    ).toEqual([]);
  });

  it('never heard of does not keep the others from following', () => {
    const on = new Rehearsal(plan).ready().input(1, Number.NaN);
    for (let us = 0; us < 4 * S; us += 10 * MS)
      on.pose(20, 0)
        .input(1, Number.NaN)
        .reads()
        .run(10 * MS);
    expect(on.state()).toBe('following');
    expect(on.anglesDeg()).toEqual([expect.closeTo(20, 6), 0, 0]);
  });

  it('does not keep an arm from going home', () => {
    const on = new Rehearsal(plan)
      .following()
      .plays(2 * S, () => [10, 10])
      .key('park');
    railed(on, 3 * S, 10);
    expect([on.state(), ...on.anglesDeg()]).toEqual(['holding', 0, 0, 0]);
  });
});

describe('poses instead of readings', () => {
  const pose = (on: Rehearsal, ...deg: number[]): void => {
    on.deliver({ kind: 'pose', tUs: on.nowUs, poseRad: Float64Array.from(deg, (d) => d * DEG) }).run(10 * MS);
  };

  it('are followed as they are', () => {
    const on = new Rehearsal(plan).ready();
    for (let i = 0; i < 400; i++) pose(on, 20, -20);
    expect(on.state()).toBe('following');
    expect(on.anglesDeg()).toEqual([expect.closeTo(20, 6), expect.closeTo(0, 6), expect.closeTo(-20, 6)]);
  });

  it.each([Number.NaN, Infinity, -Infinity])('with a hole (%s) hold what that joint feeds', (hole) => {
    const on = new Rehearsal(plan).ready();
    for (let i = 0; i < 400; i++) pose(on, 20, -20);
    for (let i = 0; i < 400; i++) pose(on, 40, hole);
    expect(on.anglesDeg()).toEqual([expect.closeTo(40, 6), expect.closeTo(0, 6), expect.closeTo(-20, 6)]);
    expect(on.told.every((told) => told.anglesRad.every(Number.isFinite) && told.pulsesUs.every(Number.isFinite))).toBe(
      true,
    );
  });

  it('with a hole from the start move nothing that it feeds', () => {
    for (const unison of [false, true]) {
      const on = new Rehearsal({ ...plan, unison }).ready();
      for (let i = 0; i < 400; i++) pose(on, 20, Number.NaN);
      expect(on.anglesDeg()).toEqual([expect.closeTo(20, 6), 0, 0]);
    }
  });
});
