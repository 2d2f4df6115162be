import fc from 'fast-check';
import { Subject } from 'rxjs';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { pipeline } from '../../src/bridge/pipeline.ts';
import { eventSource, type Stamped } from '../../src/bridge/source.ts';
import { virtualClock } from '../../src/clock/virtual.ts';
import { drive as makeDrive } from '../../src/drive/drive.ts';
import type { DriveEvent } from '../../src/drive/events.ts';
import type { FollowerStage } from '../../src/drive/follower-stage.ts';
import { random } from '../../src/sim/random.ts';
import { type Staging, randomStaging } from '../drive/random-plans.ts';
import { play, randomScenes } from '../drive/random-scenes.ts';
import type { Rehearsal } from '../drive/rehearsal.ts';
import { button, countsAt, followerSpec, leaderSpec, MS, planOf, S } from '../plans.ts';

const LONG_MS = 60_000;

/** A command as it is compared: bit for bit. */
function line(tUs: number, follower: number, kind: string, state: string, angles: Float64Array): string {
  return `${tUs} ${follower} ${kind} ${state} ${Buffer.from(angles.slice().buffer).toString('hex')}`;
}
const toldBy = (on: Rehearsal): string[] =>
  on.told.map((told) => line(told.tUs, told.follower, told.kind, told.state, told.anglesRad));

function piped({ plan, starts }: Staging): {
  lines: string[];
  bugs: unknown[];
  run: (events: Subject<DriveEvent>) => void;
} {
  const drive = makeDrive(plan, starts, 0);
  const lines: string[] = [];
  const bugs: unknown[] = [];
  const send = ({ index, kind, is, arm }: FollowerStage): void => {
    lines.push(line(drive.common.nowUs[0] as number, index, kind, is.state, arm.governor.x));
  };
  return { lines, bugs, run: (events) => void pipeline(events, drive, send, (_, bug) => bugs.push(bug)) };
}

describe('the pipeline', () => {
  it(
    'makes the commands of the plain fold, bit for bit',
    () => {
      fc.assert(
        fc.property(randomStaging, randomScenes, (staging, scenes) => {
          const on = play(staging, scenes);
          const { lines, bugs, run } = piped(staging);
          const events = new Subject<DriveEvent>();
          run(events);
          for (const { event } of on.happened) events.next(event);
          expect(bugs).toEqual([]);
          expect(lines).toEqual(toldBy(on));
        }),
        { numRuns: 50 },
      );
    },
    LONG_MS,
  );

  it(
    'makes the same commands however late its timers fire',
    () => {
      fc.assert(
        fc.property(randomStaging, randomScenes, fc.integer({ min: 1, max: 1e9 }), (staging, scenes, seed) => {
          const on = play(staging, scenes);
          const chance = random(seed, 0);
          const { plan, starts, busyUs } = staging;
          const drive = makeDrive(plan, starts, 0);
          const clock = virtualClock(0, () => Math.floor(chance.between(0, 15 * MS)));
          const source = eventSource(drive, clock, 0);
          const lines: string[] = [];
          const send = ({ index, kind, is, arm, board }: FollowerStage): void => {
            lines.push(line(drive.common.nowUs[0] as number, index, kind, is.state, arm.governor.x));
            const follower = starts.findIndex((start) => start.board === board);
            if (busyUs > 0) source.push({ kind: 'blocked', tUs: clock.nowUs(), follower, kept: false });
          };
          pipeline(source.events$, drive, send, (_, bug) => expect.unreachable(String(bug)));
          for (const { event, caused } of on.happened) {
            if (event.kind === 'tick' || caused) continue;
            clock.runTo(event.tUs);
            source.push({ ...event } as Stamped);
          }
          // The last timers may be late by 15 ms, and late is all they may be.
          source.runTo(on.nowUs - 1);
          expect(lines).toEqual(toldBy(on));
        }),
        { numRuns: 50 },
      );
    },
    LONG_MS,
  );
});

describe('a stage that throws', () => {
  const uncaught: unknown[] = [];
  const note = (bug: unknown): void => void uncaught.push(bug);
  beforeEach(() => void process.on('uncaughtException', note));
  afterEach(() => {
    process.off('uncaughtException', note);
  });

  /** Three arms on one leader; `send` may throw, and so may anything in the drive that a test breaks. */
  function troupe(send: (command: FollowerStage) => void = () => {}) {
    const plan = planOf([followerSpec(), followerSpec(), followerSpec()], {
      leader: leaderSpec(2, { buttons: [button(2, 'hold')] }),
    });
    const starts = plan.followers.map((_, board) => ({ poseRad: null, unasked: true, awake: true, board }));
    const drive = makeDrive(plan, starts, 0);
    const source = eventSource(drive, null, 0);
    const bugs: [string, unknown][] = [];
    const commands = [0, 0, 0];
    pipeline(
      source.events$,
      drive,
      (command) => {
        send(command);
        commands[command.index] = (commands[command.index] as number) + 1;
      },
      (follower, bug) => bugs.push([`${follower.index}`, bug]),
    );
    const read = (tUs: number): void =>
      source.push({ kind: 'reading', tUs, counts: Float64Array.of(countsAt(10), countsAt(10), 900) });
    return { drive, source, bugs, commands, read };
  }

  it('ends its own follower, which says so, and no other', async () => {
    const { drive, bugs, commands, read } = troupe();
    for (let t = 0; t < S; t += 10 * MS) read(t);
    const bug = new Error('planted');
    const broken = drive.followers[1] as FollowerStage;
    broken.arm.want = () => {
      throw bug;
    };
    const before = [...commands];
    for (let t = S; t < 2 * S; t += 10 * MS) read(t);
    expect(bugs).toEqual([['1', bug]]);
    expect(broken.is.state).toBe('stopped');
    expect(commands[1]).toBe(before[1]);
    for (const f of [0, 2]) expect((commands[f] as number) - (before[f] as number)).toBeGreaterThanOrEqual(49);
    await turned();
    expect(uncaught).toEqual([]);
  });

  it('ends its own follower too where it is the wire that throws', async () => {
    const bug = new RangeError('planted');
    const { bugs, commands, read } = troupe((command) => {
      if (command.index === 0 && command.commands > 10) throw bug;
    });
    for (let t = 0; t < 2 * S; t += 10 * MS) read(t);
    expect(bugs).toEqual([['0', bug]]);
    expect(commands[0]).toBe(10);
    for (const f of [1, 2]) expect(commands[f]).toBeGreaterThanOrEqual(99);
    await turned();
    expect(uncaught).toEqual([]);
  });

  it('is out for the rest of the run, whatever is pressed', () => {
    const { drive, source, commands, read } = troupe();
    read(0);
    (drive.followers[1] as FollowerStage).arm.want = () => {
      throw new Error('planted');
    };
    read(30 * MS);
    const before = commands[1];
    for (const key of ['rearm', 'go', 'join'] as const)
      source.push({ kind: 'key', tUs: 40 * MS, key, follower: -1, value: 0 });
    source.push({ kind: 'ready', tUs: 50 * MS, follower: 1, kept: true });
    for (let t = 60 * MS; t < S; t += 10 * MS) read(t);
    expect(commands[1]).toBe(before);
  });

  it('in the leader ends all of them, and the program goes on', async () => {
    const { drive, source, bugs, commands, read } = troupe();
    for (let t = 0; t < S; t += 10 * MS) read(t);
    const bug = new Error('planted');
    drive.leader.kernel.take = () => {
      throw bug;
    };
    const before = [...commands];
    for (let t = S; t < 2 * S; t += 10 * MS) read(t);
    source.runTo(10 * S);
    expect(bugs).toEqual([
      ['0', bug],
      ['1', bug],
      ['2', bug],
    ]);
    expect(commands).toEqual(before);
    expect(drive.dueUs()).toBe(Number.POSITIVE_INFINITY);
    await turned();
    expect(uncaught).toEqual([]);
  });
});

/** The turn on which RxJS would let an unhandled error loose. */
const turned = (): Promise<void> => new Promise((resolve) => setTimeout(resolve, 0));
