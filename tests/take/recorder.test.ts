import { describe, expect, it } from 'vitest';
import { Subject } from 'rxjs';
import { pipeline } from '../../src/bridge/pipeline.ts';
import { drive as makeDrive } from '../../src/drive/drive.ts';
import type { DriveEvent } from '../../src/drive/events.ts';
import { virtualClock } from '../../src/clock/virtual.ts';
import { STATES } from '../../src/follower/states.ts';
import { recorder } from '../../src/take/recorder.ts';
import { EVENT_CODES, ROW_EVENTS, ROW_KEYS, type Row } from '../../src/take/row.ts';
import { takeWriter } from '../../src/take/writer.ts';
import { filmed, headerOf, memoryDisk, opened, rowsOf, takesFolderForTests, TWO_ARMS } from './studio.ts';

const folder = takesFolderForTests();
const START_US = 1_000_000;

/** The event that a row tells of, as the drive took it. */
function eventOf(row: Row): DriveEvent {
  const kind = ROW_EVENTS[row.event];
  const tUs = row.tUs + START_US;
  switch (kind) {
    case 'reading':
      return { kind, tUs, counts: row.counts.slice() };
    case 'key':
      return { kind, tUs, key: ROW_KEYS[row.key] ?? 'mark', follower: row.follower, value: row.value };
    case 'tick':
      return { kind, tUs };
    case 'ready':
    case 'down':
    case 'reboot':
    case 'blocked':
    case 'free':
      return { kind, tUs, follower: row.follower, kept: row.kept === 1 };
    default:
      throw new Error(`no such row was recorded: ${kind}`);
  }
}

describe('a recorder', () => {
  it('writes every event of a drive, so that folding them again gives the same commands bit for bit', async () => {
    const { performance, recorder: recording, take } = filmed(folder, 'bit-for-bit');
    performance.run(2_000_000);
    performance.live.key('hold', 1);
    performance.run(500_000);
    performance.live.key('join');
    performance.run(3_000_000);
    expect(await recording.end()).toBeNull();

    const recorded = rowsOf(take());
    expect(recorded).toHaveLength(performance.events.length);

    const starts = TWO_ARMS.plan.followers.map((_, f) => ({
      poseRad: null,
      unasked: true,
      awake: false,
      board: TWO_ARMS.boards.findIndex((board) => board.followers.includes(f)),
    }));
    const again = makeDrive(TWO_ARMS.plan, starts, START_US);
    const events$ = new Subject<DriveEvent>();
    let commands: string[] = [];
    pipeline(
      events$,
      again,
      (command) => commands.push(angles(command.index, command.arm.governor.x)),
      (_, bug) => {
        throw bug;
      },
    );
    let compared = 0;
    for (const row of recorded) {
      commands = [];
      events$.next(eventOf(row));
      const written = row.followers.flatMap((arm, f) => (arm.commanded === 1 ? [angles(f, arm.angleRad)] : []));
      expect(commands).toEqual(written);
      compared += written.length;
    }
    expect(compared).toBeGreaterThan(400);
  });

  it('writes how each follower stood after the event', async () => {
    const { performance, recorder: recording, take } = filmed(folder, 'states');
    performance.run(4_000_000);
    await recording.end();
    const last = rowsOf(take()).at(-1);
    expect(last?.followers.map(({ state }) => STATES[state])).toEqual(performance.states());
    const stage = performance.live.drive.followers[1];
    expect(last?.followers[1]?.targetRad).toEqual(Float64Array.from(new Float32Array(stage?.arm.targetRad ?? [])));
    expect(last?.followers[1]?.blocks).toBe(stage?.is.blocks);
    expect(last?.poseRad).toEqual(performance.live.drive.leader.poseRad);
  });

  it('names a mark as it is asked to, and numbers one without a name', async () => {
    const { performance, recorder: recording, take } = filmed(folder, 'marks');
    performance.run(1_000_000);
    recording.mark('bow');
    performance.live.key('mark');
    performance.run(250_000);
    performance.live.key('mark');
    performance.run(100_000);
    await recording.end();
    expect(recording.is).toMatchObject({ marks: 2, lastMark: 'mark 2' });
    expect(take().marks).toEqual([
      { name: 'bow', tUs: 1_000_000 },
      { name: 'mark 2', tUs: 1_250_000 },
    ]);
  });

  it('hands a batch to the disk at least every 250 ms, and syncs at least every second', async () => {
    const clock = virtualClock(0);
    const disk = memoryDisk();
    const written: { atUs: number; bytes: number }[] = [];
    const synced: number[] = [];
    const watched = {
      ...disk,
      write: (bytes: Uint8Array, done: (error: unknown) => void) => {
        written.push({ atUs: clock.nowUs(), bytes: bytes.length });
        disk.write(bytes, done);
      },
      sync: (done: (error: unknown) => void) => {
        synced.push(clock.nowUs());
        disk.sync(done);
      },
    };
    const writer = takeWriter('paced', headerOf(TWO_ARMS), null, watched);
    const starts = TWO_ARMS.plan.followers.map((_, board) => ({ poseRad: null, unasked: true, awake: true, board }));
    const drive = makeDrive(TWO_ARMS.plan, starts, 0);
    const events$ = new Subject<DriveEvent>();
    pipeline(
      events$,
      drive,
      () => {},
      () => {},
    );
    const recording = recorder(drive, events$, clock, writer, 0);
    for (let tUs = 0; tUs < 5_000_000; tUs += 1_000) {
      clock.runTo(tUs);
      events$.next({ kind: 'tick', tUs });
    }
    await recording.end();
    for (const times of [written.map(({ atUs }) => atUs), synced].entries()) {
      const [which, instants] = times;
      expect(instants.length).toBeGreaterThan(4);
      for (let i = 1; i < instants.length; i++)
        expect((instants[i] as number) - (instants[i - 1] as number)).toBeLessThanOrEqual(
          which === 0 ? 250_000 : 1_000_000,
        );
    }
  });

  it('has one sync under way at most, however long the disk takes', () => {
    const disk = memoryDisk();
    let underWay = 0;
    let most = 0;
    const slow = {
      ...disk,
      sync: () => {
        underWay++;
        most = Math.max(most, underWay);
      },
    };
    const writer = takeWriter('slow', headerOf(TWO_ARMS), null, slow);
    for (let i = 0; i < 5; i++) {
      writer.append();
      writer.flush();
      writer.sync();
    }
    expect(most).toBe(1);
  });

  it('stops on a full disk, says so, keeps what was written, and the take opens', async () => {
    const clock = virtualClock(0);
    const disk = memoryDisk(60_000);
    const writer = takeWriter('full', headerOf(TWO_ARMS), null, disk);
    for (let i = 0; i < 1000; i++) {
      clock.runTo(i * 1000);
      writer.row.tUs = i * 1000;
      writer.append();
      if (i % 100 === 99) writer.flush();
    }
    const fault = await writer.end();
    expect(fault?.code).toBe('TAKE_DISK_FULL');
    const file = `${folder}/full.arrows`;
    const { writeFileSync } = await import('node:fs');
    writeFileSync(file, disk.bytes());
    const take = opened(file);
    expect(take.rows).toBeGreaterThan(100);
    expect(take.rows % 100).toBe(0);
    expect(rowsOf(take)).toHaveLength(take.rows);
  });

  it('gives up, rather than memory, where a disk takes nothing', () => {
    const disk = memoryDisk();
    const stuck = { ...disk, write: () => {} };
    const writer = takeWriter('stuck', headerOf(TWO_ARMS), null, stuck);
    for (let i = 0; i < 400_000 && writer.is.fault === null; i++) writer.append();
    expect(writer.is.fault?.code).toBe('TAKE_DISK_SLOW');
    expect(EVENT_CODES.reading).toBe(0);
  });
});

function angles(follower: number, x: Float64Array): string {
  return `${follower}:${Buffer.from(x.buffer, x.byteOffset, x.byteLength).toString('hex')}`;
}
