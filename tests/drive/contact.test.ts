import { describe, expect, it } from 'vitest';
import { motionFaults } from '../motion-laws.ts';
import { followerSpec, MS, planOf, S } from '../plans.ts';
import { Rehearsal, type Told } from './rehearsal.ts';

const plain = planOf([followerSpec()]);
const two = planOf([followerSpec(), followerSpec()]);
const joints = plain.followers[0]?.joints ?? [];
const swing = (tS: number): number[] => [40 * Math.sin(2 * tS), 30 * Math.sin(3 * tS)];

/** An arm that follows a leader in full swing. */
const swinging = (plan = plain): Rehearsal => new Rehearsal(plan).following().plays(2.3 * S, swing);

/** Gaps between commands, in milliseconds. */
const gaps = (told: readonly Told[]): number[] =>
  told.slice(1).map((each, i) => (each.tUs - (told[i] as Told).tUs) / MS);

describe('readings that stop', () => {
  it('start no motion once they are older than the timeout: the arm brakes and holds', () => {
    const on = swinging();
    const lastReadingUs = on.nowUs - 10 * MS;
    on.run(2 * S);
    expect(on.state()).toBe('holding');
    const late = on.commands(0, lastReadingUs + 250 * MS + 1);
    const speeds = late
      .slice(1)
      .map((each, i) => (each.anglesRad[0] as number) - ((late[i] as Told).anglesRad[0] as number));
    const growing = speeds.slice(1).filter((step, i) => Math.abs(step) > Math.abs(speeds[i] as number) + 1e-12);
    expect(growing).toEqual([]);
    expect(on.speedsDegS()).toEqual([0, 0]);
    expect(motionFaults(on.commands(), joints)).toEqual([]);
  });

  it('go on to be followed up to that very age', () => {
    const on = swinging();
    on.run(240 * MS);
    expect(on.state()).toBe('following');
    on.run(2);
    expect(on.state()).toBe('holding');
  });

  it('are joined, gently, when they come again', () => {
    const on = swinging()
      .run(S)
      .plays(20 * MS, () => [-50, 50]);
    expect(on.state()).toBe('joining');
    on.plays(5 * S, () => [-50, 50]);
    expect(on.state()).toBe('following');
  });

  it("are as good as stopped when the leader's port is down", () => {
    const on = swinging();
    on.board('down', -2);
    expect(on.state()).toBe('holding');
    on.board('ready', -2);
    expect(on.state()).toBe('holding');
    on.reads();
    expect(on.state()).toBe('joining');
  });

  it('never stop for a board that only speaks on change', () => {
    const plan = planOf(plain.followers, { leader: { ...plain.leader, timeoutUs: Number.POSITIVE_INFINITY } });
    const on = new Rehearsal(plan)
      .ready()
      .plays(4 * S, () => [20, 20])
      .run(3600 * S);
    expect(on.state()).toBe('following');
    on.board('down', -2);
    expect(on.state()).toBe('holding');
  });
});

describe('a blocked port', () => {
  it('that is free again in time goes on from the last command it took, having braked all the while', () => {
    const on = swinging();
    const before = on.commands().at(-1) as Told;
    on.board('blocked').plays(150 * MS, (tS) => swing(2.3 + tS));
    expect(on.commands().at(-1)).toBe(before);
    on.board('free');
    const first = on.commands().find((told) => told.tUs > before.tUs) as Told;
    expect(first.tUs).toBe(on.nowUs);
    on.plays(2 * S, (tS) => swing(2.45 + tS));
    expect(on.state()).toBe('following');
    expect(motionFaults(on.commands(), joints)).toEqual([]);
  });

  it('that was blocked for longer than the timeout while the arm moved is lost contact: it holds until join', () => {
    const on = swinging();
    on.board('blocked')
      .plays(400 * MS, (tS) => swing(2.3 + tS))
      .board('free');
    on.plays(S, (tS) => swing(2.7 + tS));
    expect(on.state()).toBe('holding');
    expect(on.stage().is.blocks & 8).toBe(8);
    on.key('join').plays(5 * S, () => [10, 10]);
    expect(on.state()).toBe('following');
    expect(motionFaults(on.commands(), joints)).toEqual([]);
  });

  it('under an arm that stood is nothing', () => {
    const on = new Rehearsal(plain)
      .following()
      .board('blocked')
      .plays(2 * S)
      .board('free')
      .plays(0.5 * S);
    expect(on.state()).toBe('following');
  });

  it('gives one command as it opens, not the missed ones', () => {
    const on = swinging();
    on.board('blocked').plays(S, swing);
    const fromUs = on.nowUs;
    on.board('free').plays(100 * MS, swing);
    expect(on.commands(0, fromUs).length).toBeLessThanOrEqual(6);
  });

  it('delays no other follower at all', () => {
    const on = new Rehearsal(two).following().plays(S, swing);
    const fromUs = on.nowUs;
    on.board('blocked', 0).plays(2 * S, swing);
    expect(on.commands(0, fromUs + 1)).toEqual([]);
    const other = gaps(on.commands(1, fromUs));
    expect(Math.max(...other)).toBeLessThanOrEqual(20);
    expect(on.state(1)).toBe('following');
  });
});

describe('a port that is lost', () => {
  it('and back within a second, its board running on, joins by itself from the last command', () => {
    const on = swinging();
    const before = on.commands().at(-1) as Told;
    on.board('down').plays(900 * MS, (tS) => swing(2.3 + tS));
    expect(on.state()).toBe('absent');
    on.board('ready', 0, true);
    expect(on.state()).not.toBe('waking');
    const first = on.commands().find((told) => told.tUs > before.tUs) as Told;
    expect(first.pulsing).toBe(2);
    on.key('join').plays(4 * S, () => [10, 10]);
    expect(on.state()).toBe('following');
    expect(motionFaults(on.commands(), joints)).toEqual([]);
  });

  it('and back at once goes on joining without being asked', () => {
    const on = swinging();
    on.board('down')
      .plays(100 * MS, swing)
      .board('ready', 0, true)
      .plays(20 * MS, swing);
    expect(on.state()).toBe('joining');
    expect(motionFaults(on.commands(), joints)).toEqual([]);
  });

  it.each([
    ['later than a second', 1100, true, 'ready'],
    ['in time, from a board that may have restarted', 500, false, 'ready'],
    ['after a reboot', 500, true, 'reboot'],
  ] as const)('and back %s wakes again where it was last told to be', (_, afterMs, kept, how) => {
    const asking = planOf([followerSpec(undefined, { wake: 'ask' })]);
    const on = new Rehearsal(asking, { starts: [{ unasked: false }] })
      .ready()
      .key('go')
      .plays(3 * S);
    on.plays(2.3 * S, swing);
    const last = on.commands().at(-1) as Told;
    on.board(how === 'reboot' ? 'reboot' : 'down')
      .plays(afterMs * MS, swing)
      .board('ready', 0, kept);
    on.plays(S, swing);
    expect([on.state(), on.commands().at(-1)]).toEqual(['waking', last]);
    const before = on.told.length;
    on.key('go').plays(0.3 * S, swing);
    expect(on.told.slice(before, before + 2).map((told) => told.pulsing)).toEqual([1, 2]);
    expect(on.told[before]?.anglesRad).toEqual(last.anglesRad);
  });

  it('gets no command while it is away', () => {
    const on = swinging();
    const told = on.told.length;
    on.board('down')
      .plays(5 * S, swing)
      .key('join')
      .key('go')
      .key('park')
      .key('stop')
      .plays(S, swing);
    expect(on.told.length).toBe(told);
  });

  it('leaves the other arms alone', () => {
    const on = new Rehearsal(two).following().plays(S, swing);
    const fromUs = on.nowUs;
    on.board('down', 0)
      .plays(0.5 * S, swing)
      .board('ready', 0)
      .plays(S, swing);
    expect(Math.max(...gaps(on.commands(1, fromUs)))).toBeLessThanOrEqual(20);
    expect(on.state(1)).toBe('following');
  });

  it('finishes no parking when it is back', () => {
    const on = swinging()
      .key('park')
      .plays(200 * MS, swing)
      .board('down')
      .plays(200 * MS, swing);
    on.board('ready', 0, true).plays(3 * S, swing);
    expect(on.state()).toBe('holding');
    expect(on.anglesDeg()[0]).not.toBeCloseTo(0, 3);
  });

  it('under a stopped arm stays a stop, which can be rearmed once it is back', () => {
    const on = swinging().key('stop').board('reboot').plays(S, swing);
    expect(on.state()).toBe('stopped');
    on.board('ready', 0)
      .plays(0.1 * S, swing)
      .key('rearm')
      .plays(S, swing);
    expect(on.state()).toBe('waking');
  });

  it.each([0, 1] as const)(
    'in the midst of a category %s stop has its power off as soon as it is back',
    (stopCategory) => {
      const plan = planOf([followerSpec(undefined, { stopCategory, hasPower: true })]);
      for (const kept of [true, false]) {
        const on = new Rehearsal(plan)
          .following()
          .plays(1.3 * S, swing)
          .board('blocked')
          .key('stop')
          .board('down');
        on.plays(0.3 * S, swing);
        const before = on.told.length;
        on.board('ready', 0, kept).plays(S, swing);
        const kinds = on.told.slice(before).map((told) => told.kind);
        expect(kinds).toContain('power_off');
        expect(kinds.lastIndexOf('move')).toBeLessThan(kinds.indexOf('power_off'));
        expect(kinds).not.toContain('power_on');
      }
    },
  );
});
