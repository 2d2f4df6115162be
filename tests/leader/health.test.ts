import { describe, expect, it } from 'vitest';
import { ILLS, type Ill } from '../../src/leader/health.ts';
import { type Leader, leader } from '../../src/leader/leader.ts';
import type { LeaderJointSpec } from '../../src/leader/spec.ts';
import { compileMap } from '../../src/map/compile.ts';
import { countsAt, DEG, leaderJoint, leaderSpec, MS, S } from '../plans.ts';

const STEP_US = 10 * MS;

/** A leader of one joint and the readings it has taken, one every 10 ms unless a test says otherwise. */
class Patient {
  readonly kernel: Leader;
  nowUs = 0;

  constructor(joint: Partial<LeaderJointSpec> = {}) {
    this.kernel = leader(leaderSpec(1, { joints: [leaderJoint(0, joint)] }));
  }

  reads(counts: number, afterUs = STEP_US): this {
    this.nowUs += afterUs;
    this.kernel.take(this.nowUs, Float64Array.of(counts));
    return this;
  }

  readsFor(counts: number, forUs: number): this {
    const untilUs = this.nowUs + forUs;
    while (this.nowUs < untilUs) this.reads(counts);
    return this;
  }

  get ill(): Ill {
    return ILLS[this.kernel.health.state[0] as number] as Ill;
  }

  get angleDeg(): number {
    return (this.kernel.poseRad[0] as number) / DEG;
  }
}

describe('a pot', () => {
  it('is silent before its first reading, and its joint has no angle', () => {
    const pot = new Patient();
    expect(pot.ill).toBe('silent');
    expect(pot.angleDeg).toBeNaN();
  });

  it('is sound with its first plain reading', () => {
    const pot = new Patient().reads(countsAt(30));
    expect(pot.ill).toBe('sound');
    expect(pot.angleDeg).toBeCloseTo(30, 12);
  });
});

describe('a pot at a rail', () => {
  it('is sick after 0.1 s there, where its points do not reach the rail', () => {
    const low = new Patient().reads(countsAt(10)).readsFor(0, 0.1 * S);
    // The tenth reading at the rail is the first one 0.09 s after the first of them.
    expect(low.ill).toBe('sound');
    expect(low.reads(0).ill).toBe('rail');
    expect(new Patient().reads(countsAt(10)).readsFor(1023, 0.12 * S).ill).toBe('rail');
  });

  it('is well where its points cover the rail', () => {
    const whole = compileMap(
      [
        [0, -150 * DEG],
        [1023, 150 * DEG],
      ],
      'straight',
      'extend',
    );
    const pot = new Patient({ map: whole, travelMin: 0, travelMax: 1023 });
    expect(pot.readsFor(0, S).ill).toBe('sound');
    expect(pot.readsFor(1023, S).ill).toBe('sound');
    expect(pot.angleDeg).toBeCloseTo(150, 12);
  });

  it('is forgiven a brush with it, but not followed there', () => {
    const pot = new Patient().reads(countsAt(10)).readsFor(0, 0.05 * S);
    expect(pot.ill).toBe('sound');
    expect(pot.angleDeg).toBeCloseTo(10, 12);
    pot.reads(countsAt(12));
    expect(pot.angleDeg).toBeCloseTo(12, 12);
  });
});

describe('a pot beyond its travel', () => {
  // By hand: travel 112 to 912 is 800 counts, and 5 % of it 40.
  it('is well up to 5 % past it', () => {
    expect(new Patient().readsFor(72, S).ill).toBe('sound');
    expect(new Patient().readsFor(952, S).ill).toBe('sound');
  });

  it('is sick past that for 0.1 s, and not followed from the first such reading on', () => {
    const pot = new Patient().reads(countsAt(110)).reads(953);
    expect(pot.angleDeg).toBeCloseTo(110, 12);
    expect(pot.ill).toBe('sound');
    expect(pot.readsFor(953, 0.1 * S).ill).toBe('beyond');
    expect(new Patient().reads(countsAt(0)).readsFor(71, 0.12 * S).ill).toBe('beyond');
  });
});

describe('a jumping pot', () => {
  // By hand: 11 degrees in 10 ms are 1,100 deg/s, 9 are 900.
  it('is sick at the third jump within a second', () => {
    const pot = new Patient().reads(countsAt(0)).readsFor(countsAt(0), 0.2 * S);
    pot.reads(countsAt(11)).readsFor(countsAt(11), 0.3 * S);
    pot.reads(countsAt(0)).readsFor(countsAt(0), 0.3 * S);
    expect(pot.ill).toBe('sound');
    expect(pot.reads(countsAt(11)).ill).toBe('jumping');
    expect(pot.angleDeg).toBeCloseTo(0, 12);
  });

  it('is well with a jump now and then', () => {
    const pot = new Patient().reads(countsAt(0));
    for (let i = 0; i < 8; i++) pot.readsFor(countsAt(i % 2 === 0 ? 0 : 11), 0.6 * S);
    expect(pot.ill).toBe('sound');
  });

  it('is well while a hand only turns it fast', () => {
    const pot = new Patient().reads(countsAt(-90));
    for (let angle = -90; angle <= 90; angle += 9) pot.reads(countsAt(angle));
    for (let angle = 90; angle >= -90; angle -= 9) pot.reads(countsAt(angle));
    expect(pot.ill).toBe('sound');
  });

  it('is well while readings of a turning joint only come in bursts', () => {
    // Stamps are no better than the port: two USB packets may come a millisecond apart with readings ten apart.
    const pot = new Patient().reads(countsAt(-90));
    for (let angle = -86; angle <= 90; angle += 4) pot.reads(countsAt(angle), 19 * MS).reads(countsAt(angle + 2), MS);
    expect(pot.ill).toBe('sound');
  });
});

describe('a pot that is not heard', () => {
  it('is silent once its last value is older than the timeout', () => {
    const pot = new Patient().reads(countsAt(20)).readsFor(Number.NaN, 0.25 * S);
    expect(pot.ill).toBe('sound');
    expect(pot.reads(Number.NaN).ill).toBe('silent');
    expect(pot.angleDeg).toBeCloseTo(20, 12);
  });

  it('is still shown as it was last read', () => {
    const pot = new Patient().reads(countsAt(20)).reads(Number.NaN);
    expect(pot.kernel.countsNow[0]).toBe(countsAt(20));
  });

  it('is not smoothed anew after each reading that leaves it out', () => {
    const smooth = { cutoffHz: 1, betaHzPerRadS: 0, slopeCutoffHz: 1 };
    const pot = new Patient({ smooth }).reads(countsAt(0)).reads(Number.NaN).reads(countsAt(10));
    // By hand: the step is 20 ms long, so alpha = 1 / (1 + 50 / 2 pi) = 0.1116.
    expect(pot.angleDeg).toBeCloseTo(10 / (1 + 50 / (2 * Math.PI)), 10);
  });
});

describe('a sick pot', () => {
  it('is sound again after a second without any symptom, and its joint keeps its angle until then', () => {
    const pot = new Patient().reads(countsAt(10)).readsFor(0, 0.2 * S);
    pot.readsFor(countsAt(50), S - STEP_US);
    expect([pot.ill, pot.angleDeg]).toEqual(['rail', expect.closeTo(10, 12)]);
    pot.reads(countsAt(50));
    expect([pot.ill, pot.angleDeg]).toEqual(['sound', expect.closeTo(50, 12)]);
  });

  it('starts its second anew with each symptom', () => {
    const pot = new Patient().reads(countsAt(10)).readsFor(0, 0.2 * S);
    for (let i = 0; i < 5; i++) pot.readsFor(countsAt(50), 0.9 * S).reads(0);
    expect(pot.ill).toBe('rail');
  });

  it('leaves nothing of its bad readings in the filter', () => {
    const smooth = { cutoffHz: 1, betaHzPerRadS: 0, slopeCutoffHz: 1 };
    const pot = new Patient({ smooth })
      .reads(countsAt(10))
      .readsFor(0, 0.2 * S)
      .readsFor(countsAt(50), S);
    expect(pot.angleDeg).toBeCloseTo(50, 12);
  });

  it('that never was sound has no angle to follow', () => {
    const pot = new Patient().readsFor(0, 0.3 * S);
    expect(pot.ill).toBe('rail');
    expect(pot.angleDeg).toBeNaN();
  });
});
