import { describe, expect, it } from 'vitest';
import { drive as makeDrive, type Drive } from '../../src/drive/drive.ts';
import type { DriveEvent } from '../../src/drive/events.ts';
import type { FollowerStage } from '../../src/drive/follower-stage.ts';
import type { CompiledRig } from '../../src/rig/compiled.ts';
import { random } from '../../src/sim/random.ts';
import { take } from '../drive/fold.ts';
import { motionFaults } from '../motion-laws.ts';
import { MS, S } from '../plans.ts';
import { Performance, rigOf, rigYaml } from './performance.ts';

const trio = rigOf(
  rigYaml([
    ['wren', 'sim:arm?seed=2'],
    ['heron', 'sim:arm?seed=3'],
    ['stork', 'sim:arm?seed=3'],
  ]),
);

interface Kept {
  readonly tUs: number;
  readonly follower: number;
  readonly line: string;
  readonly anglesRad: Float64Array;
  readonly pulsing: number;
}

/** Notes every command of a drive as it is made, from outside: by what has changed after each event. */
function commandsOf(drive: Drive): { kept: Kept[]; after(event: DriveEvent): void } {
  const seen = drive.followers.map((f) => f.commands);
  const kept: Kept[] = [];
  const note = ({ index, kind, is, arm }: FollowerStage, tUs: number): void => {
    const anglesRad = arm.governor.x.slice();
    const hex = Buffer.from(anglesRad.buffer).toString('hex');
    kept.push({
      tUs,
      follower: index,
      line: `${tUs} ${index} ${kind} ${is.state} ${hex}`,
      anglesRad,
      pulsing: arm.frame.pulsing,
    });
  };
  return {
    kept,
    after(event) {
      drive.followers.forEach((follower, f) => {
        if (follower.commands !== seen[f]) note(follower, event.tUs);
        seen[f] = follower.commands;
      });
    },
  };
}

/** The commands of a live run, and those of a plain fold of the events it recorded. */
function liveAndFolded(rig: CompiledRig, perform: (on: Performance) => void, baud?: number, latenessUs?: () => number) {
  const on = new Performance(rig, {
    ...(baud === undefined ? {} : { baud }),
    ...(latenessUs === undefined ? {} : { latenessUs }),
  });
  const startUs = on.clock.nowUs();
  const live = commandsOf(on.live.drive);
  on.live.events$.subscribe((event) => live.after(event));
  perform(on);
  const starts = rig.plan.followers.map((_, f) => ({
    poseRad: null,
    unasked: true,
    awake: false,
    board: rig.boards.findIndex((board) => board.followers.includes(f)),
  }));
  const drive = makeDrive(rig.plan, starts, startUs);
  const folded = commandsOf(drive);
  for (const event of on.events) {
    take(drive, event, () => {});
    folded.after(event);
  }
  return { on, live: live.kept, folded: folded.kept };
}

describe('a live run', () => {
  it('follows the hand with every arm', () => {
    const on = new Performance(trio).run(8 * S);
    expect(on.states()).toEqual(['following', 'following', 'following']);
    expect(on.bugs).toEqual([]);
    expect(on.words.filter((word) => word.kind === 'greeted')).toHaveLength(3);
    expect(on.live.status().boards.map((board) => [board.port, board.ready, board.followers.length])).toEqual([
      ['sim:hand?seed=7', true, 0],
      ['sim:arm?seed=2', true, 1],
      ['sim:arm?seed=3', true, 2],
    ]);
  });

  it.each([
    ['in whole messages, on punctual timers', undefined, undefined],
    ['a byte at a time, on timers late by up to 15 ms', 115_200, 15 * MS],
  ] as const)('read %s, recorded and folded again gives equal bytes, through keys and an unplug', (_, baud, lateUs) => {
    const chance = random(11, 0);
    const lateness = lateUs === undefined ? undefined : (): number => Math.floor(chance.between(0, lateUs));
    const { on, live, folded } = liveAndFolded(
      trio,
      (performance) => {
        performance.run(6 * S);
        performance.live.key('pace', -1, 0.5);
        performance.run(S);
        performance.live.key('clutch', 0);
        performance.run(0.5 * S);
        performance.live.key('clutch', 0);
        performance.board('sim:arm?seed=3').far.unplug();
        performance.run(2 * S);
        performance.board('sim:arm?seed=3').far.replug();
        performance.run(6 * S);
        performance.live.key('park', 1);
        performance.board('sim:arm?seed=2').far.block();
        performance.run(0.2 * S);
        performance.board('sim:arm?seed=2').far.release();
        performance.run(2 * S);
        performance.live.key('stop');
        performance.run(S);
        performance.live.key('rearm');
        performance.live.key('join');
        performance.run(3 * S);
      },
      baud,
      lateness,
    );
    expect(on.refused).toBe(0);
    const kinds = new Set(on.events.map((event) => event.kind));
    for (const kind of ['ready', 'blocked', 'free', 'reading', 'key', 'down'] as const) expect(kinds).toContain(kind);
    expect(live.length).toBeGreaterThan(1000);
    expect(folded.map((each) => each.line)).toEqual(live.map((each) => each.line));
    for (const [f, spec] of trio.plan.followers.entries()) {
      // Split where a wake starts anew: the unplugged arms, at their first pulses.
      const sequences: Kept[][] = [[]];
      for (const each of live.filter((kept) => kept.follower === f)) {
        if (each.pulsing < spec.servos.length) sequences.push([]);
        else sequences.at(-1)?.push(each);
      }
      expect(sequences.flatMap((sequence) => motionFaults(sequence, spec.joints))).toEqual([]);
    }
  });

  it('leaves the others alone while one board is unplugged, and wakes it again when it is back', () => {
    const on = new Performance(trio).run(8 * S);
    const arm = on.board('sim:arm?seed=2');
    arm.far.unplug();
    const before = on.live.drive.followers.map((f) => f.commands);
    on.run(2 * S);
    expect(on.states()).toEqual(['absent', 'following', 'following']);
    const made = on.live.drive.followers.map((f, i) => f.commands - (before[i] as number));
    expect(made[0]).toBe(0);
    for (const f of [1, 2]) expect(made[f]).toBeGreaterThanOrEqual(99);
    expect(on.words.some((word) => word.kind === 'lost_port')).toBe(true);
    arm.far.replug();
    on.run(8 * S);
    expect(on.states()).toEqual(['following', 'following', 'following']);
  });

  it('holds everything when the hand is unplugged, and joins it again', () => {
    const on = new Performance(trio).run(8 * S);
    on.board('sim:hand?seed=7').far.unplug();
    on.run(S);
    expect(on.states()).toEqual(['holding', 'holding', 'holding']);
    expect(on.live.drive.followers.some((f) => f.is.moving)).toBe(false);
    on.board('sim:hand?seed=7').far.replug();
    on.run(8 * S);
    expect(on.states()).toEqual(['following', 'following', 'following']);
  });

  it('wakes an arm again whose board was reset under it', () => {
    const on = new Performance(trio).run(8 * S);
    on.board('sim:arm?seed=2').reset();
    on.run(0.35 * S);
    expect(on.words.some((word) => word.kind === 'rebooted')).toBe(true);
    expect(on.live.status().boards[1]?.reboots).toBe(1);
    on.run(8 * S);
    expect(on.states()).toEqual(['following', 'following', 'following']);
  });

  it('resolves when nothing moves any more, or says that it could not wait', async () => {
    const on = new Performance(trio).run(8 * S);
    on.live.key('hold');
    let still: boolean | null = null;
    void on.live.still(5 * S).then((result) => (still = result));
    on.run(S);
    await Promise.resolve();
    expect(still).toBe(true);
    const moving = new Performance(trio).run(5 * S);
    while (!moving.live.drive.followers.every((f) => Math.abs(f.arm.governor.v[0] as number) > 0.1))
      moving.run(20 * MS);
    let waited: boolean | null = null;
    void moving.live.still(40 * MS).then((result) => (waited = result));
    moving.run(60 * MS);
    await Promise.resolve();
    expect(waited).toBe(false);
  });

  it('says nothing more once it is closed', async () => {
    const on = new Performance(trio).run(8 * S);
    const closing = on.live.close();
    const events = on.events.length;
    const words = on.words.length;
    on.live.key('stop');
    on.run(2 * S);
    await closing;
    expect([on.events.length, on.words.length]).toEqual([events, words]);
  });

  it('sends nothing in a dry run, and opens the hand only', () => {
    const on = new Performance(trio, { dry: true }).run(8 * S);
    expect([...on.boards.keys()]).toEqual(['sim:hand?seed=7']);
    expect(on.states()).toEqual(['following', 'following', 'following']);
  });
});
