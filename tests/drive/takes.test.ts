import { describe, expect, it } from 'vitest';
import { motionFaults } from '../motion-laws.ts';
import { button, DEG, followerSpec, leaderSpec, MS, planOf, PRESSED, S } from '../plans.ts';
import { Rehearsal } from './rehearsal.ts';

const plan = planOf([followerSpec()]);
const joints = plan.followers[0]?.joints ?? [];

/** A rehearsal in which a take can lead, joint by joint or follower by follower. */
class Playback extends Rehearsal {
  /** The take leads these of the leader's joints from now on. */
  leads(...posed: number[]): this {
    return this.deliver({ kind: 'lead', tUs: this.nowUs, posed: Uint8Array.from(posed), targets: false });
  }

  /** The take's commands lead from now on. */
  commandsLead(on = true): this {
    return this.deliver({ kind: 'lead', tUs: this.nowUs, posed: Uint8Array.of(0, 0), targets: on });
  }

  says(...deg: number[]): this {
    return this.deliver({ kind: 'pose', tUs: this.nowUs, poseRad: Float64Array.from(deg, (d) => d * DEG) });
  }

  aims(deg: readonly number[], degS: readonly number[] = [0, 0]): this {
    const anglesRad = Float64Array.from(deg, (d) => d * DEG);
    const speedsRadS = Float64Array.from(degS, (d) => d * DEG);
    return this.deliver({ kind: 'target', tUs: this.nowUs, follower: 0, anglesRad, speedsRadS });
  }

  /** Does the same every 10 ms for a while. */
  repeats(forUs: number, each: () => void): this {
    for (let us = 0; us < forUs; us += 10 * MS) {
      each();
      this.run(10 * MS);
    }
    return this;
  }
}

const close = (...deg: number[]): number[] => deg.map((d) => expect.closeTo(d, 6) as number);

describe('a take that leads', () => {
  it('is joined gently, and moves the joints it leads while the hand keeps the others', () => {
    const on = new Playback(plan).following().plays(2 * S, () => [10, 10]);
    on.leads(1, 0).says(-40, 60);
    expect(on.state()).toBe('joining');
    on.repeats(5 * S, () => on.says(-40, 60).pose(10, 20).reads());
    expect(on.anglesDeg()).toEqual(close(-40, 20));
    on.leads(0, 0);
    expect(on.state()).toBe('joining');
    on.plays(5 * S, () => [10, 20]);
    expect(on.anglesDeg()).toEqual(close(10, 20));
    expect(motionFaults(on.commands(), joints)).toEqual([]);
  });

  it.each([Number.NaN, Infinity])('holds what a joint feeds that it has no angle for (%s)', (hole) => {
    for (const unison of [false, true]) {
      const on = new Playback({ ...plan, unison }).following().leads(1, 1);
      on.repeats(4 * S, () => on.says(20, 20));
      on.repeats(4 * S, () => on.says(40, hole));
      expect(on.anglesDeg()).toEqual(close(40, 20));
      expect(on.told.every((told) => told.anglesRad.every(Number.isFinite))).toBe(true);
    }
  });

  it('before any reading came leads nothing astray', () => {
    const on = new Playback(plan).ready().leads(1, 1);
    on.repeats(4 * S, () => on.says(20, Number.NaN));
    expect(on.anglesDeg()).toEqual(close(20, 0));
    on.leads(0, 0).run(S);
    expect(on.anglesDeg()).toEqual(close(20, 0));
    expect(on.state()).toBe('holding');
  });

  it('gives way to a hand that has not been heard yet without following nothing', () => {
    const changing = planOf(plan.followers, { leader: leaderSpec(2, { timeoutUs: Number.POSITIVE_INFINITY }) });
    const on = new Playback(changing).ready().commandsLead();
    on.repeats(3 * S, () => on.aims([10, 10]));
    on.commandsLead(false).input(1, Number.NaN);
    on.repeats(3 * S, () => on.joint(0, 30).input(1, Number.NaN).reads());
    expect(on.anglesDeg()).toEqual(close(30, 10));
  });

  it('that falls silent lets nothing move on', () => {
    const on = new Playback(plan).following().leads(1, 1);
    on.repeats(4 * S, () => on.says(20, 20));
    on.says(80, 80).run(0.1 * S);
    const before = on.nowUs;
    on.run(S);
    expect(on.state()).toBe('holding');
    expect(on.speedsDegS()).toEqual([0, 0]);
    expect(on.commands(0, before).length).toBeGreaterThan(3);
  });
});

describe('commands of a take', () => {
  it('are gone to gently, then matched with their speeds', () => {
    const on = new Playback(plan).following().commandsLead();
    on.repeats(4 * S, () => on.aims([30, -20]));
    expect([on.state(), ...on.anglesDeg()]).toEqual(['following', ...close(30, -20)]);
    const startUs = on.nowUs;
    const worst = { deg: 0 };
    on.repeats(2 * S, () => {
      const tS = (on.nowUs - startUs) / S;
      on.aims([30 + 20 * tS, -20], [20, 0]);
      if (tS > 1) worst.deg = Math.max(worst.deg, Math.abs((on.anglesDeg()[0] as number) - 30 - 20 * tS));
    });
    expect(worst.deg).toBeLessThan(20 * 0.03);
    expect(motionFaults(on.commands(), joints)).toEqual([]);
  });

  it.each([
    [
      [Number.NaN, 0],
      [0, 0],
    ],
    [
      [Infinity, 0],
      [0, 0],
    ],
    [
      [30, 0],
      [Number.NaN, 0],
    ],
    [
      [30, 0],
      [Infinity, 0],
    ],
  ])('that are no numbers (%s at %s) move nothing, with the clutch in or out', (deg, degS) => {
    const on = new Playback(plan).following().commandsLead();
    on.repeats(3 * S, () => on.aims([10, 10]));
    on.repeats(S, () => on.aims(deg, degS)).key('clutch');
    on.repeats(S, () => on.aims(deg, degS)).key('clutch');
    on.repeats(S, () => on.aims(deg, degS));
    expect(on.anglesDeg()[0]).toBeCloseTo(10, 6);
    expect(on.told.every((told) => told.anglesRad.every(Number.isFinite))).toBe(true);
  });
});

describe('an enable pedal while a take leads', () => {
  const pedalled = planOf([followerSpec()], { leader: leaderSpec(2, { buttons: [button(2, 'enable')] }) });

  it('has to be held all the same, and is not held once it is not heard any more', () => {
    const on = new Playback(pedalled).input(2, PRESSED).following().leads(1, 1);
    on.repeats(4 * S, () => on.says(20, 20).reads());
    expect(on.state()).toBe('following');
    on.repeats(0.2 * S, () => on.says(30, 30));
    expect(on.state()).toBe('following');
    on.repeats(0.1 * S, () => on.says(40, 40));
    expect(on.state()).toBe('holding');
    on.repeats(S, () => on.says(80, 80));
    expect(on.speedsDegS()).toEqual([0, 0]);
    on.repeats(0.1 * S, () => on.says(80, 80).reads());
    expect(on.state()).toBe('joining');
  });

  it.each([250 * MS, Number.POSITIVE_INFINITY])('is let go with the port of its board (timeout %s us)', (timeoutUs) => {
    const { leader } = pedalled;
    const on = new Playback({ ...pedalled, leader: { ...leader, timeoutUs } })
      .input(2, PRESSED)
      .following()
      .leads(1, 1);
    on.repeats(4 * S, () => on.says(20, 20).reads());
    on.board('down', -2);
    expect(on.state()).toBe('holding');
    on.repeats(S, () => on.says(80, 80));
    expect(on.state()).toBe('holding');
  });
});
