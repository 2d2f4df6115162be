import { describe, expect, it } from 'vitest';
import { followerSpec, MS, planOf, S } from '../plans.ts';
import { Rehearsal } from './rehearsal.ts';

const plain = planOf([followerSpec()]);
const swing = (tS: number): number[] => [40 * Math.sin(2 * tS), 30 * Math.sin(3 * tS)];

/** When commands went out since `fromUs`, in milliseconds after it. */
const times = (on: Rehearsal, fromUs: number, follower = 0): number[] =>
  on.commands(follower, fromUs).map((told) => (told.tUs - fromUs) / MS);

describe('pacing', () => {
  it('gives a moving arm one command a period, readings or not', () => {
    const on = new Rehearsal(plain).following().plays(S, swing);
    const fromUs = on.nowUs;
    on.run(100 * MS);
    const at = times(on, fromUs);
    expect(at.length).toBeGreaterThanOrEqual(5);
    for (let i = 1; i < at.length; i++) expect((at[i] as number) - (at[i - 1] as number)).toBe(20);
  });

  it('tells a still arm where it is every half second, and of each reading once', () => {
    const on = new Rehearsal(plain)
      .following()
      .run(240 * MS)
      .reads()
      .run(240 * MS)
      .reads()
      .run(100 * MS);
    const fromUs = on.nowUs;
    on.reads().run(200 * MS);
    expect(times(on, fromUs)).toEqual([0]);
    const later = new Rehearsal(
      planOf(plain.followers, { leader: { ...plain.leader, timeoutUs: 3600 * S } }),
    ).following();
    later.run(S);
    const sinceUs = later.told.at(-1)?.tUs as number;
    later.run(2 * S);
    expect(times(later, sinceUs)).toEqual([0, 500, 1000, 1500, 2000]);
  });

  it('sends a reading at once that comes within a tenth of the period before the command is due, and no earlier', () => {
    const on = new Rehearsal(plain)
      .following()
      .run(200 * MS)
      .reads();
    const fromUs = on.nowUs;
    on.run(17.9 * MS).reads();
    expect(times(on, fromUs)).toEqual([0]);
    on.run(0.1 * MS).reads();
    expect(times(on, fromUs)).toEqual([0, 18]);
    on.run(17.9 * MS)
      .reads()
      .run(2.2 * MS);
    expect(times(on, fromUs)).toEqual([0, 18, 38]);
  });

  it('takes a reading of the due instant into the command', () => {
    const on = new Rehearsal(plain)
      .following()
      .run(200 * MS)
      .reads();
    const fromUs = on.nowUs;
    on.run(20 * MS - 1).pose(1, 0);
    on.nowUs += 1;
    on.reads();
    expect(times(on, fromUs)).toEqual([0, 20]);
    expect(on.stage().arm.targetRad[0]).not.toBe(0);
  });

  it('lets no pause be made up for: a step is two periods long at most', () => {
    const on = new Rehearsal(plain).following().plays(2 * S);
    on.run(300 * MS)
      .pose(80, 0)
      .reads();
    on.run(40 * MS).reads();
    const steps = on.commands(0, on.nowUs - 60 * MS).map((told) => told.anglesRad[0] as number);
    // By hand: from a stand at 240 deg/s^2, 40 ms make 0.192 degrees.
    expect(steps.length).toBeGreaterThan(0);
    expect(steps[0] as number).toBeLessThanOrEqual((0.5 * 240 * 0.04 ** 2 * Math.PI) / 180 + 1e-12);
  });

  it('lets arms of different rates go each at its own', () => {
    const plan = planOf([
      followerSpec(),
      followerSpec(undefined, { periodUs: 3_000 }),
      followerSpec(undefined, { periodUs: 100 * MS }),
    ]);
    const on = new Rehearsal(plan).following().plays(S, swing);
    const fromUs = on.nowUs;
    on.plays(S, swing);
    const counts = [0, 1, 2].map((f) => times(on, fromUs, f).length);
    expect(counts[0]).toBeGreaterThanOrEqual(50);
    expect(counts[0]).toBeLessThanOrEqual(56);
    expect(counts[1]).toBeGreaterThanOrEqual(333);
    expect(counts[1]).toBeLessThanOrEqual(371);
    expect(counts[2]).toBeGreaterThanOrEqual(10);
    expect(counts[2]).toBeLessThanOrEqual(12);
  });

  it('keeps rig order at one instant', () => {
    const on = new Rehearsal(planOf([followerSpec(), followerSpec(), followerSpec()])).following().plays(S, swing);
    const order = on.told
      .slice(-30)
      .filter((told) => told.tUs === on.told.at(-1)?.tUs)
      .map((told) => told.follower);
    expect(order).toEqual(order.toSorted((a, b) => a - b));
  });
});

describe('followers on one board', () => {
  const pair = planOf([followerSpec(), followerSpec()]);
  const starts = [{ board: 0 }, { board: 0 }];

  it('get one command at a time, and turns when the board is too slow for both', () => {
    const on = new Rehearsal(pair, { starts, busyUs: 15 * MS }).following().plays(S, swing);
    const fromUs = on.nowUs;
    on.plays(3 * S, swing);
    const both = on.told.filter((told) => told.tUs >= fromUs);
    for (let i = 1; i < both.length; i++)
      expect((both[i]?.tUs as number) - (both[i - 1]?.tUs as number)).toBeGreaterThanOrEqual(15 * MS);
    const [first, second] = [times(on, fromUs, 0), times(on, fromUs, 1)];
    expect(first.length).toBeGreaterThan(80);
    expect(Math.abs(first.length - second.length)).toBeLessThanOrEqual(1);
  });

  it('of different rates share a slow board without starving either', () => {
    const plan = planOf([
      followerSpec(undefined, { periodUs: 5 * MS }),
      followerSpec(undefined, { periodUs: 50 * MS }),
    ]);
    const on = new Rehearsal(plan, { starts, busyUs: 15 * MS }).following().plays(S, swing);
    const fromUs = on.nowUs;
    on.plays(2 * S, swing);
    const slow = times(on, fromUs, 1);
    expect(slow.length).toBeGreaterThan(25);
    for (let i = 1; i < slow.length; i++)
      expect((slow[i] as number) - (slow[i - 1] as number)).toBeLessThanOrEqual(100);
  });

  it('that are switched off do not wait behind the motions of the other', () => {
    const plan = planOf([followerSpec(), followerSpec(undefined, { stopCategory: 0, hasPower: true })]);
    const on = new Rehearsal(plan, { starts, busyUs: 25 * MS }).following().plays(2 * S, swing);
    const pressedUs = on.nowUs;
    on.key('stop', 1).plays(100 * MS, swing);
    const off = on.commands(1, pressedUs).find((told) => told.kind === 'power_off') as { tUs: number };
    expect(off.tUs - pressedUs).toBeLessThanOrEqual(25 * MS);
  });

  it('on boards of their own take nothing from each other', () => {
    const on = new Rehearsal(pair, { busyUs: 15 * MS }).following().plays(S, swing);
    const fromUs = on.nowUs;
    on.plays(S, swing);
    for (const follower of [0, 1]) expect(times(on, fromUs, follower).length).toBeGreaterThanOrEqual(50);
  });
});
