import { describe, expect, it } from 'vitest';
import { type EventSource, eventSource, type Stamped } from '../../src/bridge/source.ts';
import { virtualClock, type VirtualClock } from '../../src/clock/virtual.ts';
import type { DriveEvent } from '../../src/drive/events.ts';

/** A drive that is due at the given instants, each once. */
class Due {
  #instants: number[];

  constructor(...instants: number[]) {
    this.#instants = instants;
  }

  dueUs(): number {
    return this.#instants[0] ?? Number.POSITIVE_INFINITY;
  }

  /** A tick has done what was due. */
  done(event: DriveEvent): void {
    if (event.kind === 'tick') this.#instants.shift();
  }

  add(us: number): void {
    this.#instants = [...this.#instants, us].toSorted((a, b) => a - b);
  }
}

const reading = (tUs: number): Stamped => ({ kind: 'reading', tUs, counts: new Float64Array(1) });
const mark = (tUs: number): Stamped => ({ kind: 'key', tUs, key: 'mark', follower: -1, value: 0 });

/** A source and what it delivered, each as `kind instant`. */
function watched(due: Due, clock: VirtualClock | null = null, startUs = 0): { source: EventSource; told: string[] } {
  const source = eventSource(due, clock, startUs);
  const told: string[] = [];
  source.events$.subscribe((event) => {
    told.push(`${event.kind} ${event.tUs}`);
    due.done(event);
  });
  return { source, told };
}

describe('the stream of events', () => {
  it('is ticks due before a reading, the reading, and ticks due at it', () => {
    const { source, told } = watched(new Due(10, 20, 30, 40));
    source.push(reading(30));
    expect(told).toEqual(['tick 10', 'tick 20', 'reading 30', 'tick 30']);
    source.push(reading(35));
    expect(told.slice(4)).toEqual(['reading 35']);
  });

  it('goes on by itself on a clock, at the instants that are due', () => {
    const clock = virtualClock();
    const due = new Due(10);
    const { source, told } = watched(due, clock);
    source.push(mark(0));
    due.add(25);
    clock.runTo(100);
    expect(told).toEqual(['key 0', 'tick 10', 'tick 25']);
  });

  it('carries the instant that was due, however late the timer fires', () => {
    const late = [7, 13, 2];
    const clock = virtualClock(0, () => late.shift() ?? 0);
    const { source, told } = watched(new Due(10, 20, 30), clock);
    source.push(mark(0));
    clock.runTo(100);
    expect(told).toEqual(['key 0', 'tick 10', 'tick 20', 'tick 30']);
  });

  it('catches up on a late timer before what arrives meanwhile', () => {
    const clock = virtualClock(0, () => 50);
    const { source, told } = watched(new Due(10, 20), clock);
    source.push(mark(0));
    clock.runTo(15);
    source.push(reading(15));
    expect(told).toEqual(['key 0', 'tick 10', 'reading 15']);
    clock.runTo(200);
    expect(told.slice(3)).toEqual(['tick 20']);
  });

  it('never goes back: an earlier stamp is raised to the last one', () => {
    const { source, told } = watched(new Due(), null, 100);
    source.push(reading(50));
    source.push(reading(120));
    source.push(reading(110));
    expect(told).toEqual(['reading 100', 'reading 120', 'reading 120']);
  });

  it('raises a tick that is overdue', () => {
    const due = new Due();
    const { source, told } = watched(due);
    source.events$.subscribe((event) => {
      if (event.kind === 'reading' && event.tUs === 100) due.add(40);
    });
    source.push(reading(100));
    source.push(reading(200));
    expect(told).toEqual(['reading 100', 'tick 100', 'reading 200']);
  });

  it('delivers what a delivery causes right after it, at its instant, never inside it', () => {
    const due = new Due(30);
    const { source, told } = watched(due);
    let depth = 0;
    source.events$.subscribe((event) => {
      depth++;
      expect(depth).toBe(1);
      // What is caused is stamped later than the event that causes it, as a clock would.
      if (event.kind === 'reading') source.push({ kind: 'blocked', tUs: 33, follower: 0, kept: false });
      if (event.kind === 'blocked') source.push({ kind: 'free', tUs: 34, follower: 0, kept: false });
      depth--;
    });
    source.push(reading(30));
    expect(told).toEqual(['reading 30', 'blocked 30', 'free 30', 'tick 30']);
  });

  it('runs to an instant where it is told to', () => {
    const { source, told } = watched(new Due(10, 20, 30));
    source.runTo(20);
    expect(told).toEqual(['tick 10', 'tick 20']);
  });

  it('ends when it is closed, and takes nothing more', () => {
    const clock = virtualClock();
    const { source, told } = watched(new Due(10, 20), clock);
    let ended = false;
    source.events$.subscribe({ complete: () => (ended = true) });
    source.push(mark(0));
    source.close();
    expect(ended).toBe(true);
    expect(clock.nextUs()).toBe(Number.POSITIVE_INFINITY);
    source.push(mark(15));
    source.runTo(100);
    clock.runTo(100);
    expect(told).toEqual(['key 0']);
    expect(clock.nextUs()).toBe(Number.POSITIVE_INFINITY);
  });

  it('tells a drive that asks for ticks without end', () => {
    const source = eventSource({ dueUs: () => 10 }, null, 0);
    expect(() => source.runTo(20)).toThrow(/ticks without end/);
  });
});
