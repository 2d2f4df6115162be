import { describe, expect, it } from 'vitest';
import { DEG, followerJoint, followerSpec, MS, planOf, S } from '../plans.ts';
import { Rehearsal } from './rehearsal.ts';

const three = [followerJoint(0), followerJoint(1), followerJoint(null)];
const asking = followerSpec(undefined, { wake: 'ask' });

describe('an arm that wakes', () => {
  it('gets no pulse before the go', () => {
    const on = new Rehearsal(planOf([asking])).ready().plays(2 * S, () => [30, 30]);
    expect(on.state()).toBe('waking');
    expect(on.told).toEqual([]);
    on.key('go').plays(S);
    expect(on.told.length).toBeGreaterThan(0);
  });

  it('gets none from joining, holding or parking either', () => {
    const on = new Rehearsal(planOf([asking])).ready();
    for (const key of ['join', 'hold', 'park', 'clutch', 'pace', 'rearm', 'mark'] as const)
      on.key(key, 0, 1).plays(0.3 * S, () => [30, 30]);
    expect(on.told).toEqual([]);
  });

  it('asks nobody where its profile says so, or the operator has said so beforehand', () => {
    expect(new Rehearsal(planOf([followerSpec()])).ready().run(S).told).not.toEqual([]);
    expect(new Rehearsal(planOf([asking]), { starts: [{ unasked: true }] }).ready().run(S).told).not.toEqual([]);
  });

  it('that has lost its pulses in mid-run waits for the go, whatever its profile says: it has sunk meanwhile', () => {
    const on = new Rehearsal(planOf([followerSpec()]))
      .following()
      .plays(S, () => [30, 30])
      .board('reboot')
      .ready();
    const told = on.told.length;
    on.plays(2 * S, () => [30, 30]);
    expect([on.state(), on.told.length]).toEqual(['waking', told]);
    on.key('go').plays(S, () => [30, 30]);
    expect(on.told.length).toBeGreaterThan(told);
  });

  it('gets one servo after another, 100 ms apart, all at its wake pose', () => {
    const poseRad = Float64Array.of(20 * DEG, -40 * DEG, 10 * DEG);
    const on = new Rehearsal(planOf([followerSpec(three)]), { starts: [{ poseRad }] })
      .run(70 * MS)
      .ready()
      .run(210 * MS);
    expect(on.told.map((told) => [told.tUs / MS, told.pulsing])).toEqual([
      [70, 1],
      [170, 2],
      [270, 3],
    ]);
    for (const told of on.told) expect([...told.anglesRad]).toEqual([...poseRad]);
    // By hand: 1500 + angle * 1880 / 180.
    const pulses = [20, -40, 10].map((deg) => expect.closeTo(1500 + (deg * 1880) / 180, 9) as number);
    expect([...(on.told[0]?.pulsesUs ?? [])]).toEqual(pulses);
  });

  it('wakes at rest where nothing else is known', () => {
    const joints = [followerJoint(0, { restRad: -20 * DEG })];
    const on = new Rehearsal(planOf([followerSpec(joints)])).ready().run(10 * MS);
    expect(on.told[0]?.anglesRad[0]).toBeCloseTo(-20 * DEG, 12);
  });

  it('waits for the servos of the arms before it', () => {
    const on = new Rehearsal(planOf([followerSpec(three), followerSpec(), asking, followerSpec()])).ready().run(2 * S);
    const first = (follower: number): number | undefined => on.commands(follower)[0]?.tUs;
    expect([first(0), first(1), first(3)]).toEqual([0, 300 * MS, 500 * MS]);
    on.key('go', 2).run(S);
    expect(first(2)).toBe(2 * S);
  });

  it('joins only once all its servos have pulses', () => {
    const on = new Rehearsal(planOf([followerSpec(three)])).ready().plays(190 * MS, () => [40, 40]);
    expect(on.state()).toBe('waking');
    on.plays(30 * MS, () => [40, 40]);
    expect(on.state()).toBe('joining');
  });

  it('gives no two servos their first pulse at once, even when its port was blocked meanwhile', () => {
    const on = new Rehearsal(planOf([followerSpec(three)]))
      .ready()
      .board('blocked')
      .run(500 * MS)
      .board('free')
      .run(S);
    const firsts = [1, 2, 3].map((n) => on.told.find((told) => told.pulsing === n)?.tUs);
    expect(firsts).toEqual([0, 500 * MS, 600 * MS]);
  });

  it('switches its power on before the first pulse', () => {
    const on = new Rehearsal(planOf([followerSpec(undefined, { hasPower: true, stopCategory: 1 })]))
      .ready()
      .run(50 * MS);
    expect(on.told.map((told) => told.kind)).toEqual(['power_on', 'move']);
  });

  it('holds, and moves nothing, while something blocks it', () => {
    const on = new Rehearsal(planOf([followerSpec()])).ready().run(S);
    expect(on.state()).toBe('holding');
    expect(on.anglesDeg()).toEqual([0, 0]);
  });

  it('that is stopped meanwhile gets no further servo', () => {
    const on = new Rehearsal(planOf([followerSpec(three)]))
      .ready()
      .run(50 * MS)
      .key('stop')
      .run(S);
    expect(on.told.map((told) => told.pulsing)).toEqual([1]);
    expect(on.state()).toBe('stopped');
  });
});
