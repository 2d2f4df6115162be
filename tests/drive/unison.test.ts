import { describe, expect, it } from 'vitest';
import { motionFaults } from '../motion-laws.ts';
import { DEG, followerJoint, followerSpec, MS, planOf, S } from '../plans.ts';
import { Rehearsal } from './rehearsal.ts';

const fast = followerSpec(
  [
    followerJoint(0, { speedRadS: 120 * DEG, accelRadS2: 500 * DEG }),
    followerJoint(1, { speedRadS: 120 * DEG, accelRadS2: 500 * DEG }),
  ],
  { name: 'wren', periodUs: 10 * MS },
);
/** Half the size in one joint, slow, and asked less often. */
const slow = followerSpec(
  [
    followerJoint(0, { gain: 0.5, speedRadS: 10 * DEG, accelRadS2: 30 * DEG }),
    followerJoint(1, { speedRadS: 30 * DEG, accelRadS2: 80 * DEG }),
  ],
  { name: 'stork', periodUs: 40 * MS },
);
const troupe = planOf([fast, slow], { unison: true });
const swing = (tS: number): number[] => [60 * Math.sin(1.5 * tS), 50 * Math.sin(2.3 * tS)];

const lawful = (on: Rehearsal): string[] =>
  on.drive.plan.followers.flatMap((spec, f) =>
    motionFaults(
      on.commands(f).filter((told) => told.pulsing === spec.servos.length),
      spec.joints,
    ).map((fault) => `${spec.name} ${fault}`),
  );

/** Leader angle that each command stands for: what the remap was given, joint by joint. */
const leaderAngles = (on: Rehearsal, follower: number, fromUs: number): [number, number][] =>
  on.commands(follower, fromUs).map((told) => {
    const gain = on.drive.plan.followers[follower]?.joints[0]?.gain ?? 1;
    return [(told.anglesRad[0] as number) / gain / DEG, (told.anglesRad[1] as number) / DEG];
  });

describe('in unison', () => {
  it('all arms keep step with the one that has to move slowest', () => {
    const on = new Rehearsal(troupe).following().plays(2 * S);
    const fromUs = on.nowUs;
    const apart: number[] = [];
    on.plays(8 * S, () => [80, -45]);
    // Wherever both were told something at one instant, they stand for the same leader pose.
    for (const mine of on.commands(0, fromUs)) {
      const theirs = on.commands(1, fromUs).find((told) => told.tUs === mine.tUs);
      if (theirs === undefined) continue;
      apart.push(Math.abs((mine.anglesRad[0] as number) - (theirs.anglesRad[0] as number) / 0.5) / DEG);
      apart.push(Math.abs((mine.anglesRad[1] as number) - (theirs.anglesRad[1] as number)) / DEG);
    }
    expect(apart.length).toBeGreaterThan(100);
    expect(Math.max(...apart)).toBeLessThan(0.01);
    expect(on.anglesDeg(1)).toEqual([expect.closeTo(40, 6), expect.closeTo(-45, 6)]);
    expect(lawful(on)).toEqual([]);
  });

  it('arms that turn further than the leader limit its acceleration, too', () => {
    const large = followerSpec([
      followerJoint(0, { gain: 2, speedRadS: 100 * DEG, accelRadS2: 60 * DEG }),
      followerJoint(1),
    ]);
    const on = new Rehearsal(planOf([fast, large], { unison: true })).following().plays(2 * S);
    const fromUs = on.nowUs;
    on.plays(4 * S, () => [40, 0]);
    const apart = on.commands(1, fromUs).flatMap((theirs) => {
      const mine = on.commands(0, fromUs).find((told) => told.tUs === theirs.tUs);
      return mine === undefined
        ? []
        : [Math.abs((mine.anglesRad[0] as number) - (theirs.anglesRad[0] as number) / 2) / DEG];
    });
    expect(apart.length).toBeGreaterThan(50);
    expect(Math.max(...apart)).toBeLessThan(0.01);
    expect(lawful(on)).toEqual([]);
  });

  it('the others wait for an arm that has only just met, while its limits open', () => {
    const on = new Rehearsal(troupe).following().key('hold', 1).plays(S).key('join', 1);
    while (on.state(1) !== 'following') on.plays(10 * MS);
    const fromUs = on.nowUs;
    on.plays(6 * S, () => [60, -45]);
    const apart = on.commands(1, fromUs).flatMap((theirs) => {
      const mine = on.commands(0, fromUs).find((told) => told.tUs === theirs.tUs);
      return mine === undefined
        ? []
        : [Math.abs((mine.anglesRad[0] as number) - (theirs.anglesRad[0] as number) / 0.5) / DEG];
    });
    expect(apart.length).toBeGreaterThan(50);
    expect(Math.max(...apart)).toBeLessThan(0.1);
  });

  it('the slowest arm goes at its limit: 10 deg/s of it are 20 of the leader', () => {
    const on = new Rehearsal(troupe).following().plays(2 * S);
    on.plays(2 * S, () => [80, 0]);
    expect(on.speedsDegS(1)[0]).toBeCloseTo(10, 6);
    expect(on.speedsDegS(0)[0]).toBeCloseTo(20, 6);
  });

  it('the way to a pose is straight, as near as starting and braking let it be', () => {
    const on = new Rehearsal(troupe).following().plays(2 * S);
    const fromUs = on.nowUs;
    on.plays(8 * S, () => [80, -40]);
    const bows = leaderAngles(on, 0, fromUs).map(([a, b]) => Math.abs(a * -40 - b * 80) / Math.hypot(80, 40));
    expect(Math.max(...bows)).toBeLessThan(0.05 * Math.hypot(80, 40));
  });

  it('an arm that only just follows holds nobody up against its limits, and breaks none', () => {
    const on = new Rehearsal(troupe).ready().plays(12 * S, swing);
    expect([on.state(0), on.state(1)]).toEqual(['following', 'following']);
    expect(lawful(on)).toEqual([]);
  });

  it('arms that do not follow do not count', () => {
    const on = new Rehearsal(troupe)
      .following()
      .plays(2 * S)
      .key('hold', 1)
      .plays(0.5 * S);
    on.plays(1.5 * S, () => [80, 0]);
    expect(on.anglesDeg(0)[0]).toBeCloseTo(80, 3);
    expect(lawful(on)).toEqual([]);
  });

  it('the virtual leader never runs away, whenever an arm begins to follow', () => {
    const agile = followerSpec(fast.joints, { periodUs: 3 * MS });
    for (let offsetUs = 0; offsetUs < 3 * MS; offsetUs += 150) {
      const on = new Rehearsal(planOf([agile], { unison: true })).run(offsetUs).ready();
      on.nowUs = Math.ceil(on.nowUs / (10 * MS)) * 10 * MS;
      let worst = 0;
      const startUs = on.nowUs;
      for (let i = 0; i < 400; i++) {
        on.pose(...swing((on.nowUs - startUs) / S))
          .reads()
          .run(10 * MS);
        const { poseRad, kernel } = on.drive.leader;
        for (const j of [0, 1])
          worst = Math.max(worst, Math.abs((poseRad[j] as number) - (kernel.poseRad[j] as number)));
      }
      expect(on.state()).toBe('following');
      // By hand: 115 deg/s of the hand and 500 deg/s^2 of the arm are 13 degrees of lag, and a reading's way of 1.2.
      expect(worst / DEG).toBeLessThan(20);
      expect(lawful(on)).toEqual([]);
    }
  });

  it('joining at once, as in a trace, starts from the first reading', () => {
    const starts = [{ awake: true }, { awake: true }];
    const on = new Rehearsal(troupe, { starts }).plays(4 * S, () => [20, 20]);
    expect([on.state(0), on.state(1)]).toEqual(['following', 'following']);
    expect(on.anglesDeg(0)).toEqual([expect.closeTo(20, 6), expect.closeTo(20, 6)]);
  });

  it('the pace counts for the virtual leader too', () => {
    const on = new Rehearsal(troupe)
      .following()
      .plays(2 * S)
      .key('pace', 0, 0.5)
      .plays(2 * S, () => [80, 0]);
    expect(on.speedsDegS(1)[0]).toBeCloseTo(5, 6);
    expect(on.speedsDegS(0)[0]).toBeCloseTo(10, 6);
  });

  it('a clutched arm stands while the others go on', () => {
    const on = new Rehearsal(troupe)
      .following()
      .plays(2 * S)
      .key('clutch', 0)
      .plays(5 * S, () => [30, 0]);
    expect(on.anglesDeg(0)[0]).toBeCloseTo(0, 6);
    expect(on.anglesDeg(1)[0]).toBeCloseTo(15, 6);
    on.key('clutch', 0).plays(5 * S, () => [40, 0]);
    expect(on.anglesDeg(0)[0]).toBeCloseTo(10, 6);
    expect(lawful(on)).toEqual([]);
  });
});
