import fc from 'fast-check';
import { Subject } from 'rxjs';
import { describe, expect, it } from 'vitest';
import { pipeline } from '../../src/bridge/pipeline.ts';
import { virtualClock } from '../../src/clock/virtual.ts';
import { drive as makeDrive } from '../../src/drive/drive.ts';
import type { DriveEvent } from '../../src/drive/events.ts';
import type { TakeDisk } from '../../src/take/disk.ts';
import { recorder } from '../../src/take/recorder.ts';
import { takeWriter, type TakeWriter } from '../../src/take/writer.ts';
import { headerOf, TWO_ARMS } from './studio.ts';

const STEP_US = 5_000;
const RUN_US = 6_000_000;

interface Losses {
  /** The most that `kill -9` would have lost at any instant: rows that the system has not got. */
  readonly killedUs: number;
  /** The most that a power cut would have lost: rows that the disk itself has not got. */
  readonly cutUs: number;
  readonly syncs: number;
}

/** Records events every 5 ms to a disk whose writes and syncs take their time, and looks at every one of them. */
function losses(writeUs: number, syncUs: number, lateUs: () => number): Losses {
  const clock = virtualClock(0, lateUs);
  const of: { writer: TakeWriter | null } = { writer: null };
  let writtenUs = 0;
  let durableUs = 0;
  let syncs = 0;
  let rowUs = 0;
  let handed = 0;
  const disk: TakeDisk = {
    // What stands in a batch that is handed over now: every row so far.
    write: (_, done) => {
      const upTo = rowUs;
      handed++;
      clock.at(clock.nowUs() + writeUs, () => {
        writtenUs = upTo;
        done(null);
      });
    },
    sync: (done) => {
      const upTo = writtenUs;
      syncs++;
      clock.at(clock.nowUs() + syncUs, () => {
        durableUs = upTo;
        done(null);
      });
    },
    truncate: (_, done) => done(null),
    close: (done) => done(null),
  };
  of.writer = takeWriter('cut', headerOf(TWO_ARMS), null, disk);
  const starts = TWO_ARMS.plan.followers.map((_, board) => ({ poseRad: null, unasked: true, awake: true, board }));
  const drive = makeDrive(TWO_ARMS.plan, starts, 0);
  const events$ = new Subject<DriveEvent>();
  pipeline(
    events$,
    drive,
    () => {},
    (_, bug) => {
      throw bug;
    },
  );
  recorder(drive, events$, clock, of.writer, 0);
  let killedUs = 0;
  let cutUs = 0;
  for (let tUs = STEP_US; tUs <= RUN_US; tUs += STEP_US) {
    clock.runTo(tUs);
    killedUs = Math.max(killedUs, rowUs - writtenUs);
    cutUs = Math.max(cutUs, rowUs - durableUs);
    rowUs = tUs;
    events$.next({ kind: 'tick', tUs });
  }
  expect(handed).toBeGreaterThan(RUN_US / 300_000);
  return { killedUs, cutUs, syncs };
}

describe('What a recording can lose', () => {
  it('is at most 0.3 s by kill -9 and 1.25 s by a power cut, on a disk that takes 250 ms to sync', () => {
    const { killedUs, cutUs, syncs } = losses(20_000, 250_000, () => 0);
    expect(killedUs).toBeLessThanOrEqual(300_000);
    expect(cutUs).toBeLessThanOrEqual(1_250_000);
    // It would be easy to lose little by syncing all the time: the disk is to be spared.
    expect(syncs).toBeLessThanOrEqual(RUN_US / 800_000 + 1);
    expect(syncs).toBeGreaterThanOrEqual(RUN_US / 1_000_000);
  });

  it('keeps to that on any disk that is as fast, with timers that fire late', () => {
    const upTo = (most: number): fc.Arbitrary<number> => fc.integer({ min: 0, max: most });
    fc.assert(
      fc.property(
        upTo(40_000),
        upTo(200_000),
        fc.array(upTo(15_000), { minLength: 1, maxLength: 20 }),
        (writeUs, syncUs, late) => {
          let k = 0;
          const { killedUs, cutUs } = losses(writeUs, syncUs, () => late[k++ % late.length] as number);
          expect(killedUs).toBeLessThanOrEqual(300_000);
          expect(cutUs).toBeLessThanOrEqual(1_250_000);
        },
      ),
      { numRuns: 20 },
    );
  });

  it('is what has waited where a sync never ends, and no second one is begun', () => {
    const { cutUs, syncs } = losses(0, 60_000_000, () => 0);
    expect(syncs).toBe(1);
    expect(cutUs).toBeGreaterThan(5_000_000);
  });
});
