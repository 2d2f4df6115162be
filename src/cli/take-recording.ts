import { rmSync } from 'node:fs';
import type { Observable } from 'rxjs';
import { type Cancel, type Clock, US_PER_S } from '../clock/clock.ts';
import type { Drive } from '../drive/drive.ts';
import type { DriveEvent } from '../drive/events.ts';
import type { CompiledRig } from '../rig/compiled.ts';
import type { LoadedRig } from '../rig/load.ts';
import { newTakeFile, type TakeDisk } from '../take/disk.ts';
import { takeFault, type TakeFault, takeSentence } from '../take/fault.ts';
import { freeBytes, takeFile, takeNames } from '../take/folder.ts';
import { type Made, takeHeader, type TakeHeader } from '../take/header.ts';
import { type Recorder, recorder } from '../take/recorder.ts';
import { takeWriter } from '../take/writer.ts';
import type { Companion, Company } from './companion.ts';
import { size } from './take-show.ts';

export interface RecordingOptions {
  readonly folder: string;
  /** Proved to be free before anything moves; null: it begins when the key is pressed, under the next free one. */
  readonly name: string | null;
  /** Before it begins, microseconds; 0: with the very first event; null: it begins when `start` is called. */
  readonly countInUs: number | null;
  /** Names that its marks get in turn; those after them are numbered. */
  readonly marks: readonly string[];
  readonly rig: CompiledRig;
  readonly profiles: LoadedRig['profiles'];
}

/** The disk that takes live on; a test is one too. */
export interface RecordingDisk {
  newFile(file: string): { readonly disk: TakeDisk } | { readonly fault: TakeFault };
  freeBytes(folder: string): number | null;
  /** Removes a file that was made and never written to. */
  remove(file: string): void;
}

/** A recording of a run, which the operator may begin, mark and end. */
export interface Recording extends Companion {
  /** Begins now under a name; a fault has been said. */
  start(name: string, made: Made): void;
  stop(): void;
  /** Marks this moment under a name. */
  mark(name: string): void;
}

/** Less room than this and no recording begins; a running one ends while the disk can still take its end. */
const ROOM_MIN_BYTES = 64 * 1024 * 1024;
/** From here on it is said. */
const ROOM_LOW_BYTES = 1024 * 1024 * 1024;
const LOOK_US = US_PER_S;
const LOOKS_A_ROOM_LOOK = 10;
const RECORDED: Made = { by: 'record', parents: [], how: {}, posed: false };
/** Batches encoded before anything moves: the first ones of a cold process would keep commands waiting. */
const WARM_BATCHES = 30;

const REAL_DISK: RecordingDisk = {
  newFile: newTakeFile,
  freeBytes,
  remove: (file) => rmSync(file, { force: true }),
};

interface Running {
  readonly name: string;
  readonly recorder: Recorder;
  readonly cancel: Cancel;
}

/** Finds out before anything is opened that could move whether it can record; null: it cannot, and has said why. */
export function recording(
  options: RecordingOptions,
  say: (text: string) => void,
  disk: RecordingDisk = REAL_DISK,
): Recording | null {
  const { folder, rig, profiles, marks, countInUs } = options;
  const inputs = rig.boards.find(({ leads }) => leads)?.plan.inputs?.names ?? [];
  let source: { readonly drive: Drive; readonly events$: Observable<DriveEvent>; readonly clock: Clock } | null = null;
  let company: Company | null = null;
  let running: Running | null = null;
  let ending: Promise<void> = Promise.resolve();
  let cancelCount: Cancel = () => {};
  let countedUs: number | null = null;
  let free: number | null = null;
  let isWell = true;

  const tell = (text: string, weight: 'note' | 'care' = 'note'): void => {
    if (company === null) say(`${text}\n`);
    else company.say({ text, weight });
  };
  const refuse = (fault: TakeFault): void => {
    isWell = false;
    tell(`no take is recorded: ${takeSentence(fault)}`, 'care');
  };

  const fileFor = (name: string): { readonly file: string; readonly disk: TakeDisk } | TakeFault => {
    const place = takeFile(folder, name);
    if ('fault' in place) return place.fault;
    free = disk.freeBytes(folder);
    if (free !== null && free < ROOM_MIN_BYTES)
      return takeFault('TAKE_DISK_FULL', name, `the disk of ${folder} has ${size(free)} left`);
    const made = disk.newFile(place.file);
    return 'fault' in made ? made.fault : { file: place.file, disk: made.disk };
  };

  /** A file is made to see that it can be, and goes again: whoever leaves before it begins leaves no empty take. */
  const proved = (name: string): TakeFault | null => {
    const made = fileFor(name);
    if ('code' in made) return made;
    made.disk.close(() => {});
    disk.remove(made.file);
    return null;
  };

  const headerAt = (startUs: number, fromStart: boolean, made: Made): TakeHeader =>
    takeHeader(rig, inputs, startUs, fromStart, made);

  const roll = (name: string, to: TakeDisk, fromStart: boolean, made: Made): void => {
    if (source === null) return;
    const { drive, events$, clock } = source;
    // Stamps are due instants, earlier than now: none is earlier than that of the event last handled.
    const startUs = drive.common.nowUs[0] as number;
    const writer = takeWriter(name, headerAt(startUs, fromStart, made), profiles, to);
    const begun = recorder(drive, events$, clock, writer, startUs, marks);
    running = { name, recorder: begun, cancel: watch(begun, clock) };
  };

  const announce = (): void => {
    if (running === null || company === null) return;
    const room = free === null ? '' : `; ${size(free)} free`;
    tell(`recording ${running.name}${room}; m marks, t ends`, isLow() ? 'care' : 'note');
  };
  const isLow = (): boolean => free !== null && free < ROOM_LOW_BYTES;

  /** Looks to the disk now and then, and ends while there is room for an end. */
  const watch = (begun: Recorder, clock: Clock): Cancel => {
    let looks = 0;
    const look = (): void => {
      cancel = clock.at(clock.nowUs() + LOOK_US, look);
      if (begun.is.fault !== null) return stop();
      if (++looks % LOOKS_A_ROOM_LOOK !== 0) return;
      const wasLow = isLow();
      free = disk.freeBytes(folder);
      if (free !== null && free < ROOM_MIN_BYTES) {
        tell(`the disk has ${size(free)} left: the recording ends`, 'care');
        stop();
      } else if (free !== null && isLow() && !wasLow) tell(`the disk has ${size(free)} left`, 'care');
    };
    let cancel = clock.at(clock.nowUs() + LOOK_US, look);
    return () => cancel();
  };

  const stop = (): void => {
    if (running === null) return;
    const { name, recorder: begun, cancel } = running;
    running = null;
    cancel();
    ending = begun.end().then((fault) => {
      const { tUs, rows, marks: count } = begun.is;
      const length = `${(tUs / US_PER_S).toFixed(1)} s, ${rows} rows, ${count} ${count === 1 ? 'mark' : 'marks'}`;
      if (fault !== null) isWell = false;
      company?.sayLast(
        fault === null
          ? { text: `recorded ${name}: ${length}, in ${folder}`, weight: 'note' }
          : { text: `${takeSentence(fault)} (${length})`, weight: 'care' },
      );
    });
  };

  const freeName = (): string => {
    const taken = new Set(takeNames(folder));
    let n = 1;
    while (taken.has(`${rig.name}-${n}`)) n++;
    return `${rig.name}-${n}`;
  };

  const start = (name: string, made: Made, fromStart = false): void => {
    const prepared = fileFor(name);
    if ('code' in prepared) return refuse(prepared);
    roll(name, prepared.disk, fromStart, made);
    announce();
  };

  const count = (name: string, leftUs: number): void => {
    if (source === null) return;
    countedUs = leftUs;
    if (leftUs <= 0) {
      countedUs = null;
      start(name, RECORDED);
      return;
    }
    tell(`recording ${name} in ${Math.ceil(leftUs / US_PER_S)}`);
    const { clock } = source;
    const stepUs = Math.min(leftUs, US_PER_S);
    cancelCount = clock.at(clock.nowUs() + stepUs, () => count(name, leftUs - stepUs));
  };

  const fault = options.name === null ? null : proved(options.name);
  if (fault !== null) {
    say(`error: ${takeSentence(fault)}\n`);
    return null;
  }
  warmUp(headerAt(0, false, RECORDED));

  return {
    onStart(drive, events$, clock) {
      source = { drive, events$, clock };
      if (options.name !== null && countInUs === 0) start(options.name, RECORDED, true);
    },
    begin(to) {
      company = to;
      if (options.name !== null && countInUs !== null && countInUs > 0) count(options.name, countInUs);
      else announce();
    },
    standing() {
      if (countedUs !== null) return `${options.name} in ${Math.ceil(countedUs / US_PER_S)} s`;
      if (running === null) return '';
      const room = isLow() && free !== null ? `, ${size(free)} free` : '';
      return `recording ${running.name} ${Math.floor(running.recorder.is.tUs / US_PER_S)} s${room}`;
    },
    key(key) {
      if (key === 'mark') {
        if (running === null) return tell('no take is being recorded; t begins one');
        company?.live.key('mark');
        const { lastMark, marks: done } = running.recorder.is;
        const next = marks[done] === undefined ? '' : `; next is ${marks[done]}`;
        tell(`${running.name}: ${lastMark}${next}`);
      } else if (key === 'record') {
        if (running === null && countedUs === null) start(freeName(), RECORDED);
        else if (running !== null) stop();
      }
    },
    start,
    stop,
    mark(name) {
      running?.recorder.mark(name);
      company?.live.key('mark');
    },
    async end() {
      cancelCount();
      stop();
      await ending;
      return isWell;
    },
  };
}

function warmUp(header: TakeHeader): void {
  const nowhere: TakeDisk = {
    write: (_, done) => done(null),
    sync: (done) => done(null),
    truncate: (_, done) => done(null),
    close: (done) => done(null),
  };
  const writer = takeWriter('', header, null, nowhere);
  for (let batch = 0; batch < WARM_BATCHES; batch++) {
    for (let i = 0; i < 50; i++) writer.append();
    writer.flush();
  }
}
