import type { Observable } from 'rxjs';
import { type Cancel, type Clock, US_PER_MS } from '../clock/clock.ts';
import type { Drive } from '../drive/drive.ts';
import type { DriveEvent } from '../drive/events.ts';
import type { FollowerStage } from '../drive/follower-stage.ts';
import type { TakeFault } from './fault.ts';
import { EVENT_CODES, KEY_CODES, NO_FOLLOWER, NO_KEY, type Row, type RowFollower, STATE_CODES } from './row.ts';
import type { TakeWriter } from './writer.ts';

/**
 * Writes down a drive while it runs: each event, and how leader and followers stood after it. The loop that moves arms
 * only copies numbers; encoding happens four times a second, the disk on other threads.
 */
export interface Recorder {
  readonly is: Readonly<RecorderStanding>;
  /** Names the next mark; without a name it is numbered. */
  mark(name: string): void;
  /** Ends the take; resolves with why it is not whole, or null. */
  end(): Promise<TakeFault | null>;
}

export interface RecorderStanding {
  /** Since the take began, integer microseconds. */
  tUs: number;
  rows: number;
  bytes: number;
  /** How many marks it has, and the last one's name. */
  marks: number;
  lastMark: string;
  fault: TakeFault | null;
}

/** `kill -9` may lose 0.3 s: what waits for its batch, and what is on its way to the system. */
const FLUSH_US = 200 * US_PER_MS;
/** A power cut may lose 1.25 s: 0.8 s up to the next sync, a batch, and what writing and syncing take. */
const FLUSHES_A_SYNC = 4;
/** So long after a batch was handed over a sync finds it written. */
const SYNC_AFTER_US = 100 * US_PER_MS;

/**
 * Begins at once. Subscribe after the drive's own pipeline: each event is written as it has been handled.
 * @param startUs clock stamp of t_us = 0
 * @param names of its marks, in order; those after them are numbered
 */
export function recorder(
  drive: Drive,
  events$: Observable<DriveEvent>,
  clock: Clock,
  writer: TakeWriter,
  startUs: number,
  names: readonly string[] = [],
): Recorder {
  const { leader, followers } = drive;
  const { row } = writer;
  const commands = followers.map((stage) => stage.commands);
  const is: RecorderStanding = { tUs: 0, rows: 0, bytes: 0, marks: 0, lastMark: '', fault: null };
  let asked: string | null = null;

  const nameMark = (): string => {
    is.lastMark = asked ?? names[is.marks] ?? `mark ${is.marks + 1}`;
    is.marks++;
    asked = null;
    return is.lastMark;
  };

  const pressedMark = (): boolean => {
    for (let k = 0; k < leader.pressedCount; k++) if (leader.pressed[k]?.key === 'mark') return true;
    return false;
  };

  const write = (event: DriveEvent): void => {
    fillEvent(row, event);
    row.tUs = event.tUs - startUs;
    const isMark = event.kind === 'key' ? event.key === 'mark' : event.kind === 'reading' && pressedMark();
    row.name = isMark ? nameMark() : '';
    row.poseRad.set(leader.poseRad);
    for (let f = 0; f < followers.length; f++) {
      const stage = followers[f] as FollowerStage;
      fillFollower(row.followers[f] as RowFollower, stage, stage.commands !== commands[f]);
      commands[f] = stage.commands;
    }
    writer.append();
    is.tUs = row.tUs;
  };

  const subscription = events$.subscribe(write);
  let cancelFlush: Cancel = () => {};
  let cancelSync: Cancel = () => {};
  let flushes = 0;
  const flush = (): void => {
    writer.flush();
    is.rows = writer.is.rows;
    is.bytes = writer.is.bytes;
    is.fault = writer.is.fault;
    const nowUs = clock.nowUs();
    cancelFlush = clock.at(nowUs + FLUSH_US, flush);
    if (flushes++ % FLUSHES_A_SYNC === 0) cancelSync = clock.at(nowUs + SYNC_AFTER_US, writer.sync);
  };
  flush();

  return {
    is,
    mark(name) {
      asked = name === '' ? null : name;
    },
    end() {
      subscription.unsubscribe();
      cancelFlush();
      cancelSync();
      return writer.end().then((fault) => {
        is.rows = writer.is.rows;
        is.bytes = writer.is.bytes;
        is.fault = fault;
        return fault;
      });
    },
  };
}

function fillEvent(row: Row, event: DriveEvent): void {
  row.event = EVENT_CODES[event.kind];
  row.key = NO_KEY;
  row.follower = NO_FOLLOWER;
  row.kept = 0;
  row.servo = -1;
  row.value = Number.NaN;
  row.counts.fill(Number.NaN);
  switch (event.kind) {
    case 'reading':
      row.counts.set(event.counts);
      return;
    case 'key':
      row.key = KEY_CODES[event.key];
      row.follower = event.follower;
      row.value = event.value;
      return;
    case 'jog':
      row.follower = event.follower;
      row.servo = event.servo;
      row.value = event.pulseUs;
      return;
    case 'ready':
    case 'down':
    case 'reboot':
    case 'blocked':
    case 'free':
      row.follower = event.follower;
      row.kept = event.kept ? 1 : 0;
      return;
    case 'target':
      // What it asks is not kept: whoever was led by commands is played again by the angles of the followers.
      row.follower = event.follower;
      return;
    case 'lead':
      row.kept = event.targets ? 1 : 0;
      row.value = event.posed.reduce((bits, on, j) => bits + on * 2 ** j, 0);
      return;
    case 'pose':
    case 'tick':
      return;
  }
}

function fillFollower(to: RowFollower, stage: FollowerStage, commanded: boolean): void {
  const { arm, is } = stage;
  to.commanded = commanded ? 1 : 0;
  to.state = STATE_CODES[is.state];
  to.blocks = is.blocks;
  to.targetRad.set(arm.targetRad);
  to.angleRad.set(arm.governor.x);
  to.speedRadS.set(arm.governor.v);
  to.limits.set(arm.limits);
}
