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
  /** Begins with the run under this name; null: when the key is pressed, under the next free one. */
  readonly name: string | null;
  /** Before it begins, microseconds; 0: with the very first event. */
  readonly countInUs: number;
  readonly rig: CompiledRig;
  readonly profiles: LoadedRig['profiles'];
}

/** A recording of a run, which the operator may begin, mark and end. */
export interface Recording extends Companion {
  /** Begins now under a name; a fault has been said. */
  start(name: string, made: Made): void;
  stop(): void;
}

/** Less room than this and no recording begins; a running one ends while the disk can still take its end. */
const ROOM_MIN_BYTES = 64 * 1024 * 1024;
/** From here on it is said. */
const ROOM_LOW_BYTES = 1024 * 1024 * 1024;
const ROOM_LOOK_US = 10 * US_PER_S;
const RECORDED: Made = { by: 'record', parents: [], how: {} };
/** Batches encoded before anything moves: the first ones of a cold process would keep commands waiting. */
const WARM_BATCHES = 30;

/** Makes the file before anything is opened that could move; or says why it cannot. */
export function recording(options: RecordingOptions, say: (text: string) => void): Recording | null {
  const { folder, rig, profiles } = options;
  const inputs = rig.boards.find(({ leads }) => leads)?.plan.inputs?.names ?? [];
  let ready: { readonly name: string; readonly disk: TakeDisk } | null = null;
  let source: { readonly drive: Drive; readonly events$: Observable<DriveEvent>; readonly clock: Clock } | null = null;
  let company: Company | null = null;
  let running: { readonly name: string; readonly recorder: Recorder; readonly cancel: Cancel } | null = null;
  let ending: Promise<void> = Promise.resolve();
  let cancelCount: Cancel = () => {};
  let isWell = true;

  const tell = (text: string, weight: 'note' | 'care' = 'note'): void => company?.say({ text, weight });
  const refuse = (fault: TakeFault): void => {
    isWell = false;
    tell(`no take is recorded: ${takeSentence(fault)}`, 'care');
  };

  const prepare = (name: string): { readonly name: string; readonly disk: TakeDisk } | TakeFault => {
    const place = takeFile(folder, name);
    if ('fault' in place) return place.fault;
    const made = newTakeFile(place.file);
    if ('fault' in made) return made.fault;
    const free = freeBytes(folder);
    if (free === null || free >= ROOM_MIN_BYTES) return { name, disk: made.disk };
    return takeFault('TAKE_DISK_FULL', name, `the disk of ${folder} has ${size(free)} left`);
  };

  const headerAt = (startUs: number, fromStart: boolean, made: Made): TakeHeader =>
    takeHeader(rig, inputs, startUs, fromStart, made);

  const roll = (prepared: { readonly name: string; readonly disk: TakeDisk }, fromStart: boolean, made: Made): void => {
    if (source === null) return;
    const { drive, events$, clock } = source;
    // Stamps are due instants, earlier than now: none is earlier than that of the event last handled.
    const startUs = drive.common.nowUs[0] as number;
    const writer = takeWriter(prepared.name, headerAt(startUs, fromStart, made), profiles, prepared.disk);
    const begun = recorder(drive, events$, clock, writer, startUs);
    running = { name: prepared.name, recorder: begun, cancel: watch(begun, clock) };
  };

  const announce = (): void => {
    const free = freeBytes(folder);
    if (running !== null)
      tell(`recording ${running.name}${free === null ? '' : `; ${size(free)} free`}; m marks, t ends`);
  };

  /** Looks to the disk now and then, and ends while there is room for an end. */
  const watch = (begun: Recorder, clock: Clock): Cancel => {
    let toldLow = false;
    const look = (): void => {
      cancel = clock.at(clock.nowUs() + ROOM_LOOK_US, look);
      const free = freeBytes(folder);
      if (begun.is.fault !== null) stop();
      else if (free !== null && free < ROOM_MIN_BYTES) {
        tell(`the disk has ${size(free)} left: the recording ends`, 'care');
        stop();
      } else if (free !== null && free < ROOM_LOW_BYTES && !toldLow) {
        toldLow = true;
        tell(`the disk has ${size(free)} left`, 'care');
      }
    };
    let cancel = clock.at(clock.nowUs() + US_PER_S, look);
    return () => cancel();
  };

  const stop = (): void => {
    if (running === null) return;
    const { name, recorder: begun, cancel } = running;
    running = null;
    cancel();
    ending = begun.end().then((fault) => {
      const length = `${(begun.is.tUs / US_PER_S).toFixed(1)} s, ${begun.is.rows} rows, ${begun.is.marks.length} marks`;
      if (fault !== null) isWell = false;
      tell(
        fault === null ? `${name}: ${length}` : `${takeSentence(fault)} (${length})`,
        fault === null ? 'note' : 'care',
      );
    });
  };

  const freeName = (): string => {
    const taken = new Set(takeNames(folder));
    let n = 1;
    while (taken.has(`${rig.name}-${n}`)) n++;
    return `${rig.name}-${n}`;
  };

  const start = (name: string, made: Made): void => {
    const prepared = prepare(name);
    if ('code' in prepared) return refuse(prepared);
    roll(prepared, false, made);
    announce();
  };

  const count = (leftUs: number): void => {
    if (source === null || ready === null) return;
    const { clock } = source;
    if (leftUs <= 0) {
      roll(ready, false, RECORDED);
      announce();
      return;
    }
    tell(`recording ${ready.name} in ${Math.ceil(leftUs / US_PER_S)}`);
    const stepUs = Math.min(leftUs, US_PER_S);
    cancelCount = clock.at(clock.nowUs() + stepUs, () => count(leftUs - stepUs));
  };

  if (options.name !== null) {
    const prepared = prepare(options.name);
    if ('code' in prepared) {
      say(`error: ${takeSentence(prepared)}\n`);
      return null;
    }
    ready = prepared;
  }
  warmUp(headerAt(0, false, RECORDED));

  return {
    onStart(drive, events$, clock) {
      source = { drive, events$, clock };
      if (ready !== null && options.countInUs === 0) roll(ready, true, RECORDED);
    },
    begin(to) {
      company = to;
      if (ready !== null && options.countInUs > 0) count(options.countInUs);
      else announce();
    },
    key(key) {
      if (key === 'mark') {
        if (running === null) tell('no take is being recorded; t begins one');
        else {
          company?.live.key('mark');
          tell(`${running.name}: ${running.recorder.is.marks.at(-1)}`);
        }
      } else if (key === 'record') {
        if (running === null) start(freeName(), RECORDED);
        else stop();
      }
    },
    start,
    stop,
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
