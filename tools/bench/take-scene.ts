import { join } from 'node:path';
import { pipeline } from '../../src/bridge/pipeline.ts';
import { eventSource } from '../../src/bridge/source.ts';
import type { VirtualClock } from '../../src/clock/virtual.ts';
import { virtualClock } from '../../src/clock/virtual.ts';
import { type Drive, drive as makeDrive } from '../../src/drive/drive.ts';
import type { DriveEvent } from '../../src/drive/events.ts';
import { newTakeFile, offlineDisk, type TakeDisk, wholeFile } from '../../src/take/disk.ts';
import { takeSentence } from '../../src/take/fault.ts';
import { type TakeHeader, takeHeader } from '../../src/take/header.ts';
import { openTake, type Take } from '../../src/take/reader.ts';
import { type Recorder, recorder } from '../../src/take/recorder.ts';
import { copyRow, type Row, row as makeRow } from '../../src/take/row.ts';
import { takeWriter } from '../../src/take/writer.ts';
import { countAt, JOINTS, scene } from './scene.ts';

/** Every take of the bench: 8 joints and 3 followers, all due on every reading of a leader at 1 kHz. */
export const FOLLOWERS = 3;
export const INTERVAL_US = 1_000;
/** Rows of a batch, as 200 ms of them are flushed while recording. */
const BATCH_ROWS = 200;

export interface Scenery {
  readonly drive: Drive;
  readonly clock: VirtualClock;
  readonly recorder: Recorder | null;
  push(event: DriveEvent & { tUs: number }): void;
  /** Reading `k`, at its instant. */
  read(k: number): void;
  /** Waits for the disk: readings come much faster here than a kilohertz, and it may have others to serve. */
  settled(): Promise<void>;
}

/** @param file where it is recorded; null: it is not */
export function scenery(file: string | null): Scenery {
  const { plan } = scene(FOLLOWERS, 'frames');
  const starts = plan.followers.map((_, board) => ({ poseRad: null, unasked: true, awake: true, board }));
  const drive = makeDrive(plan, starts, 0);
  const source = eventSource(drive, null, 0);
  const clock = virtualClock(0);
  pipeline(
    source.events$,
    drive,
    () => {},
    (_, bug) => {
      throw bug;
    },
  );
  const disk = file === null ? null : newTakeFile(file);
  if (disk !== null && 'fault' in disk) throw new Error(takeSentence(disk.fault));
  let underWay = 0;
  const watched = (to: TakeDisk): TakeDisk => ({
    ...to,
    write(bytes, done) {
      underWay++;
      to.write(bytes, (error) => {
        underWay--;
        done(error);
      });
    },
  });
  const writer = disk === null ? null : takeWriter('bench', header(), null, watched(disk.disk));
  const event = { kind: 'reading' as const, tUs: 0, counts: new Float64Array(JOINTS) };
  return {
    drive,
    clock,
    recorder: writer === null ? null : recorder(drive, source.events$, clock, writer, 0),
    push: source.push,
    read(k) {
      event.tUs = k * INTERVAL_US;
      for (let j = 0; j < JOINTS; j++) event.counts[j] = countAt(k, j);
      clock.runTo(event.tUs);
      source.push(event);
    },
    async settled() {
      do await new Promise((resume) => setImmediate(resume));
      while (underWay > 0);
    },
  };
}

function header(): TakeHeader {
  const { plan } = scene(FOLLOWERS, 'frames');
  const inputs = plan.leader.joints.map(({ name }) => name);
  return takeHeader({ name: 'bench', plan }, inputs, 0, true, { by: 'record', parents: [], how: {}, posed: false });
}

/** A take that is another one so many times over, in batches as a recording has them. */
export function repeated(file: string, folder: string, times: number): string {
  const take = opened(file);
  const rows = Array.from(take.readFrom(0), (row): Row => {
    const kept = makeRow(take.header);
    copyRow(row, kept);
    return kept;
  });
  take.close();
  const made = wholeFile(join(folder, `${times}-times.arrows`));
  const writer = takeWriter('bench', take.header, null, offlineDisk(made));
  for (let k = 0; k < times * rows.length; k++) {
    copyRow(rows[k % rows.length] as Row, writer.row);
    writer.row.tUs = k * INTERVAL_US;
    writer.append();
    if (k % BATCH_ROWS === BATCH_ROWS - 1) writer.flush();
  }
  writer.finish();
  made.keep();
  return made.file;
}

export function opened(file: string): Take {
  const take = openTake(file);
  if ('code' in take) throw new Error(takeSentence(take));
  return take;
}
