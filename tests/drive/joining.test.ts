import { describe, expect, it } from 'vitest';
import { DEG, followerJoint, followerSpec, leaderSpec, MS, planOf, S } from '../plans.ts';
import { Rehearsal, type Told } from './rehearsal.ts';

/** When joint `j` first stood within a tenth of a degree of where it ends. */
function arrivalUs(told: readonly Told[], j: number): number {
  const end = told.at(-1)?.anglesRad[j] as number;
  return told.find((each) => Math.abs((each.anglesRad[j] as number) - end) < 0.1 * DEG)?.tUs as number;
}

/** Fastest joint speed between two commands, as a share of its limit. */
function fastest(told: readonly Told[], speedDegS = 60): number {
  let most = 0;
  for (let i = 1; i < told.length; i++) {
    const [a, b] = [told[i - 1] as Told, told[i] as Told];
    b.anglesRad.forEach((x, j) => {
      const speed = Math.abs(x - (a.anglesRad[j] as number)) / ((b.tUs - a.tUs) / S);
      most = Math.max(most, speed / (speedDegS * DEG));
    });
  }
  return most;
}

describe('joining', () => {
  it('brings all joints to a leader that lies still at the same time, to 0.1 s', () => {
    const joints = [
      followerJoint(0),
      followerJoint(1, { speedRadS: 30 * DEG, accelRadS2: 600 * DEG }),
      followerJoint(0, { gain: -0.3, speedRadS: 90 * DEG }),
    ];
    const on = new Rehearsal(planOf([followerSpec(joints)])).ready().plays(10 * S, () => [20, -25]);
    expect(on.anglesDeg()).toEqual([20, -25, -6].map((deg) => expect.closeTo(deg, 9) as number));
    const arrivals = [0, 1, 2].map((j) => arrivalUs(on.told, j));
    expect(Math.max(...arrivals) - Math.min(...arrivals)).toBeLessThanOrEqual(0.1 * S);
  });

  it('is no faster than its share of the limits until patience is gone', () => {
    const on = new Rehearsal(planOf([followerSpec()])).ready().plays(2.1 * S, () => [80, -80]);
    expect(on.state()).toBe('joining');
    expect(fastest(on.told)).toBeCloseTo(0.25, 6);
  });

  it('gets faster after two seconds, up to the whole limits after six, so that it ends', () => {
    const joints = [followerJoint(0, { speedRadS: 6 * DEG })];
    const on = new Rehearsal(planOf([followerSpec(joints)])).ready().plays(8 * S, () => [80]);
    const share = (fromS: number, toS: number): number =>
      fastest(
        on.commands(0, fromS * S).filter((told) => told.tUs < toS * S),
        6,
      );
    expect(share(0, 2)).toBeLessThanOrEqual(0.25 + 1e-6);
    // By hand: joining begins at 0; 0.25 + 0.75 * (4 - 2) / 4 at 4 s.
    expect(share(3.9, 4)).toBeCloseTo(0.625, 1);
    expect(share(6.5, 8)).toBeCloseTo(1, 6);
  });

  it('has met the leader when every joint is within one degree of it', () => {
    const on = new Rehearsal(planOf([followerSpec()])).ready();
    while (on.state() !== 'following') on.plays(10 * MS, () => [30, 10]);
    const before = on.told.findLast((told) => told.state === 'joining') as Told;
    const away = (told: Told): number =>
      Math.max(Math.abs((told.anglesRad[0] as number) / DEG - 30), Math.abs((told.anglesRad[1] as number) / DEG - 10));
    expect(away(before)).toBeGreaterThan(1);
    expect(away(on.told.at(-1) as Told)).toBeLessThanOrEqual(1);
  });

  it('does not wait for a joint that the leader takes out of its range', () => {
    const joints = [followerJoint(0, { maxRad: 10 * DEG }), followerJoint(1)];
    const on = new Rehearsal(planOf([followerSpec(joints)])).ready().plays(4 * S, () => [60, 10]);
    expect(on.state()).toBe('following');
    expect(on.anglesDeg()[0]).toBeCloseTo(10, 9);
  });

  it('meets a leader that never stands', () => {
    const swing = (tS: number): number[] => [40 * Math.sin(2 * tS), 40 * Math.cos(2 * tS)];
    const joints = [followerJoint(0, { speedRadS: 200 * DEG }), followerJoint(1, { speedRadS: 200 * DEG })];
    const on = new Rehearsal(planOf([followerSpec(joints)])).ready().plays(8 * S, swing);
    expect(on.state()).toBe('following');
  });

  it('opens the limits over one second once it has met', () => {
    const on = new Rehearsal(planOf([followerSpec()])).following();
    const metUs = on.told.find((told) => told.state === 'following')?.tUs as number;
    // Following a leader 200 degrees away from the very instant of meeting: only the limits hold it back.
    const late = new Rehearsal(planOf([followerSpec()])).ready();
    while (late.state() !== 'following') late.plays(10 * MS);
    expect(late.nowUs - 10 * MS).toBeLessThanOrEqual(metUs + 20 * MS);
    const fromUs = late.nowUs;
    late.plays(1.2 * S, () => [85, -85]);
    const share = (atS: number): number =>
      fastest(late.commands(0, fromUs + (atS - 0.05) * S).filter((told) => told.tUs <= fromUs + atS * S));
    // By hand: 0.25 + 0.75 * 0.5 half way.
    expect(share(0.5)).toBeCloseTo(0.625, 1);
    expect(share(0.5)).toBeLessThan(0.66);
    expect(share(1.1)).toBeCloseTo(1, 6);
  });

  it('is made slower by the pace, live', () => {
    const on = new Rehearsal(planOf([followerSpec()])).ready().key('pace', 0, 0.5);
    on.plays(1.5 * S, () => [80, -80]);
    expect(fastest(on.told)).toBeCloseTo(0.125, 6);
  });
});

describe('joining with meet: wait', () => {
  const waiting = planOf([followerSpec(undefined, { joinMeet: 'wait' })]);

  it('stands until the leader passes within three degrees, and goes with it then', () => {
    const on = new Rehearsal(waiting).ready().plays(4 * S, () => [30, 30]);
    expect([on.state(), ...on.anglesDeg()]).toEqual(['joining', 0, 0]);
    on.plays(S, () => [3.1, 0]);
    expect(on.anglesDeg()).toEqual([0, 0]);
    on.plays(0.2 * S, () => [2.9, 2.9]);
    on.plays(3 * S, () => [40, 40]);
    expect(on.state()).toBe('following');
    expect(on.anglesDeg()).toEqual([expect.closeTo(40, 9), expect.closeTo(40, 9)]);
  });

  it('does not wait for a joint that no leader joint moves', () => {
    const joints = [followerJoint(0), followerJoint(null)];
    const plan = planOf([followerSpec(joints, { joinMeet: 'wait' })], { leader: leaderSpec(1) });
    const poseRad = Float64Array.of(0, 40 * DEG);
    const on = new Rehearsal(plan, { starts: [{ poseRad }] }).ready().plays(8 * S, () => [1]);
    expect(on.state()).toBe('following');
    expect(on.anglesDeg()).toEqual([expect.closeTo(1, 9), expect.closeTo(0, 9)]);
  });
});
