import { describe, expect, it } from 'vitest';
import { type Follower, followers } from '../../src/follower/follower.ts';
import { LIMITS } from '../../src/follower/reasons.ts';
import type { FollowerJointSpec } from '../../src/follower/spec.ts';
import { DEG, followerJoint, followerSpec } from '../plans.ts';

const SOUND = Uint8Array.of(0, 0);
const FULL = Float64Array.of(1);

function arm(...joints: FollowerJointSpec[]): Follower {
  const made = followers([followerSpec(joints.length > 0 ? joints : undefined)])[0] as Follower;
  made.hold(SOUND);
  made.limitSpeed(FULL, false);
  return made;
}

const radians = (...degrees: number[]): Float64Array => Float64Array.from(degrees, (deg) => deg * DEG);
const degrees = (rad: Float64Array): number[] => [...rad].map((r) => r / DEG);
const close = (...values: number[]): number[] => values.map((v) => expect.closeTo(v, 9) as number);

/** Takes the leader's pose as the wish and steps, until nothing moves. */
function follow(it: Follower, leaderDeg: number[], clutched = false): void {
  const dt = Float64Array.of(0.02);
  do {
    it.want(radians(...leaderDeg), clutched);
    it.step(dt);
  } while (!it.governor.still());
}

describe('the follower kernel', () => {
  it('starts at rest and says the pulses of it', () => {
    const it = arm(followerJoint(0, { restRad: 45 * DEG }));
    expect(degrees(it.governor.x)).toEqual(close(45));
    expect(it.atRest()).toBe(true);
    // By hand: 1500 + 45 * 1880 / 180.
    expect([...it.frame.pulsesUs]).toEqual(close(1970));
  });

  it('stands where it is placed, inside its ranges, and wishes nothing else', () => {
    const it = arm(followerJoint(0, { maxRad: 30 * DEG }), followerJoint(1));
    it.place(radians(60, -20));
    it.aim();
    expect(degrees(it.governor.x)).toEqual(close(30, -20));
    expect(degrees(it.wantedRad)).toEqual(close(30, -20));
    expect([...it.frame.pulsesUs]).toEqual(close(1500 + (30 * 1880) / 180, 1500 - (20 * 1880) / 180));
  });

  it('goes to where the leader asks', () => {
    const it = arm();
    follow(it, [20, -35]);
    expect(degrees(it.governor.x)).toEqual(close(20, -35));
  });

  it('refuses to say an angle outside its range, whoever put it there', () => {
    const it = arm();
    it.governor.x[1] = 91 * DEG;
    it.governor.target[1] = 91 * DEG;
    expect(() => it.step(Float64Array.of(0.02))).toThrow(/wren: joint joint1 left its range/);
    it.governor.x[1] = Number.NaN;
    expect(() => it.step(Float64Array.of(0.02))).toThrow(RangeError);
  });

  it('says what holds each joint back', () => {
    const it = arm(
      followerJoint(0, { maxRad: 10 * DEG }),
      followerJoint(0, { deadbandRad: 3 * DEG }),
      followerJoint(0),
      followerJoint(1),
    );
    it.hold(Uint8Array.of(0, 4));
    for (let i = 0; i < 30; i++) {
      it.want(radians(60, 60), false);
      it.step(Float64Array.of(0.02));
    }
    expect([...it.limits]).toEqual([LIMITS.range, LIMITS.deadband | LIMITS.speed, LIMITS.speed, LIMITS.sick]);
  });
});

describe('the clutch', () => {
  it('lets the leader move without the arm, and takes hold again without a jump', () => {
    const it = arm();
    follow(it, [10, 10]);
    follow(it, [50, -30], true);
    expect(degrees(it.governor.x)).toEqual(close(10, 10));
    follow(it, [50, -30]);
    expect(degrees(it.governor.x)).toEqual(close(10, 10));
    follow(it, [55, -35]);
    expect(degrees(it.governor.x)).toEqual(close(15, 5));
    expect(degrees(it.clutchRad)).toEqual(close(-40, 40));
  });

  it('that is out before anything was asked leaves the arm where it stands', () => {
    const it = arm();
    it.place(radians(25, -25));
    follow(it, [0, 0], true);
    expect(degrees(it.governor.x)).toEqual(close(25, -25));
  });
});

describe('a joint whose pot is sick', () => {
  it('holds while the others follow, and is told free when it is well', () => {
    const it = arm();
    follow(it, [10, 10]);
    expect(it.hold(Uint8Array.of(0, 2))).toBe(false);
    follow(it, [40, 40]);
    expect(degrees(it.governor.x)).toEqual(close(40, 10));
    expect(it.hold(SOUND)).toBe(true);
    expect(it.hold(SOUND)).toBe(false);
    follow(it, [40, 40]);
    expect(degrees(it.governor.x)).toEqual(close(40, 40));
  });

  it('is any joint that such a pot feeds, however little', () => {
    const mix = followerJoint(0, {
      sources: [
        { joint: 0, weight: 1 },
        { joint: 1, weight: 0.01 },
      ],
    });
    const it = arm(mix, followerJoint(null));
    it.hold(Uint8Array.of(0, 1));
    expect([...it.held]).toEqual([1, 0]);
  });

  it('brakes inside its limits', () => {
    const it = arm();
    for (let i = 0; i < 10; i++) {
      it.want(radians(80, 80), false);
      it.step(Float64Array.of(0.02));
    }
    const speed = it.governor.v[1] as number;
    expect(speed).toBeGreaterThan(0);
    it.hold(Uint8Array.of(0, 3));
    it.want(radians(80, 80), false);
    it.step(Float64Array.of(0.02));
    expect(it.governor.v[1]).toBeCloseTo(speed - 240 * DEG * 0.02, 9);
  });
});

describe('speed limits', () => {
  it('are a share of the profile', () => {
    const it = arm();
    it.limitSpeed(Float64Array.of(0.25), false);
    expect(degrees(it.governor.speed)).toEqual(close(15, 15));
  });

  it('slow each joint down so that all arrive at once', () => {
    const it = arm(followerJoint(0), followerJoint(1, { speedRadS: 20 * DEG }), followerJoint(null));
    it.want(radians(60, 30), false);
    it.limitSpeed(Float64Array.of(1), true);
    // By hand: 60 degrees at 60 deg/s take 1 s, 30 at 20 take 1.5 s: so 40 and 20 deg/s, and a joint that is there none.
    const [first, second, third] = degrees(it.governor.speed) as [number, number, number];
    expect(first).toBeCloseTo(40, 3);
    expect(second).toBeCloseTo(20, 3);
    expect(third).toBeLessThan(0.01);
  });
});

describe('being near', () => {
  it('counts every joint that is free', () => {
    const it = arm();
    it.want(radians(0.9, 2), false);
    expect(it.near(1 * DEG, false)).toBe(false);
    it.hold(Uint8Array.of(0, 2));
    it.want(radians(0.9, 2), false);
    expect(it.near(1 * DEG, false)).toBe(true);
  });
});

describe('in unison', () => {
  it('matches a moving pose without lag', () => {
    const it = arm();
    const dt = Float64Array.of(0.02);
    for (let i = 1; i <= 100; i++) {
      it.match(radians(20 * 0.02 * i, 0), radians(20, 0));
      it.step(dt);
    }
    expect(degrees(it.governor.x)).toEqual(close(40, 0));
  });

  it('stands at the end of its range when the pose goes on', () => {
    const it = arm(followerJoint(0, { maxRad: 30 * DEG }));
    const dt = Float64Array.of(0.02);
    for (let i = 1; i <= 100; i++) {
      it.match(radians(20 * 0.02 * i), radians(20));
      it.step(dt);
    }
    expect(degrees(it.governor.x)).toEqual(close(30));
    expect(it.governor.still()).toBe(true);
  });
});
