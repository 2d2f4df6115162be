import { type Observable, Subject } from 'rxjs';
import type { Cancel, Clock } from '../clock/clock.ts';
import type { Drive } from '../drive/drive.ts';
import type { DriveEvent, TickEvent } from '../drive/events.ts';

/**
 * The one serial stream of events. Whatever arrives is delivered after the ticks that were due before it, and before
 * those due at its instant; a tick carries the instant it was due, so a timer that fires late changes nothing.
 */
export interface EventSource {
  /** Everything delivered, ticks included: the same sequence folded again gives the same commands. */
  readonly events$: Observable<DriveEvent>;
  /**
   * Delivers `event`, or, from inside a delivery, right after that one and at its instant: nothing is re-entrant.
   * A stamp earlier than the last one is raised to it.
   */
  push(event: Stamped): void;
  /** Delivers every tick due up to and including `untilUs`. */
  runTo(untilUs: number): void;
  close(): void;
}

/** An event is the source's from the moment it is pushed: its stamp may be raised. */
export type Stamped = DriveEvent & { tUs: number };

/** A drive that asks for more ticks than this without time passing is a bug of ours. */
const TICKS_AT_ONCE_MAX = 10_000;

/**
 * @param clock wakes the drive at its due instants; null: only `push` and `runTo` move it, as in `trace`
 * @param startUs nothing is delivered earlier
 */
export function eventSource(drive: Pick<Drive, 'dueUs'>, clock: Clock | null, startUs: number): EventSource {
  const subject = new Subject<DriveEvent>();
  const caused: Stamped[] = [];
  const tick: { -readonly [K in keyof TickEvent]: TickEvent[K] } = { kind: 'tick', tUs: startUs };
  // What is due changes with what is delivered and with nothing else: a drive is asked once, however often it is used.
  const last = { us: startUs, dueUs: drive.dueUs(), alarmUs: Number.POSITIVE_INFINITY };
  let delivering = false;
  let closed = false;
  let cancel: Cancel | null = null;

  const deliver = (event: Stamped): void => {
    if (event.tUs < last.us) event.tUs = last.us;
    last.us = event.tUs;
    delivering = true;
    subject.next(event);
    // What a command causes at once (a port that is now busy) is known before anything else happens.
    while (caused.length > 0) {
      const next = caused.shift() as Stamped;
      next.tUs = last.us;
      subject.next(next);
    }
    last.dueUs = drive.dueUs();
    delivering = false;
  };

  const tickBefore = (endUs: number): void => {
    let atOnce = 0;
    while (last.dueUs < endUs) {
      atOnce = last.dueUs > last.us ? 0 : atOnce + 1;
      if (atOnce > TICKS_AT_ONCE_MAX) throw new Error('the drive asks for ticks without end');
      tick.tUs = last.dueUs;
      deliver(tick);
    }
  };

  const setAlarm = (): void => {
    if (clock === null) return;
    const { dueUs } = last;
    if (dueUs === last.alarmUs) return;
    cancel?.();
    // A microsecond later than it is due: what arrives at that very instant comes before its tick, timers or not.
    cancel = dueUs === Number.POSITIVE_INFINITY ? null : clock.at(dueUs + 1, alarm);
    last.alarmUs = dueUs;
  };

  const alarm = (): void => {
    last.alarmUs = Number.POSITIVE_INFINITY;
    tickBefore((clock as Clock).nowUs());
    setAlarm();
  };

  return {
    events$: subject.asObservable(),
    push(event) {
      if (closed) return;
      if (delivering) {
        caused.push(event);
        return;
      }
      tickBefore(event.tUs);
      deliver(event);
      tickBefore(event.tUs + 1);
      setAlarm();
    },
    runTo(untilUs) {
      if (closed) return;
      tickBefore(untilUs + 1);
      setAlarm();
    },
    close() {
      // Ports still have words to say while they close, and nobody answers the drive's ticks any more.
      closed = true;
      cancel?.();
      subject.complete();
    },
  };
}
