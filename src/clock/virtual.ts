import type { Cancel, Clock } from './clock.ts';

/** A clock that stands still until it is told to run: the same inputs give the same instants, every time. */
export interface VirtualClock extends Clock {
  /** Fires every wake-up due up to and including `untilUs`, in order of time and then of asking, and stands there. */
  runTo(untilUs: number): void;
  /** The earliest wake-up asked for, or Infinity. */
  nextUs(): number;
}

interface Waiting {
  readonly atUs: number;
  readonly order: number;
  readonly wake: () => void;
}

/**
 * @param latenessUs for a wake-up asked at an instant, by how much it fires late (0 by default); lets a test
 *   plant the lateness of real timers, from a seeded source.
 */
export function virtualClock(startUs = 0, latenessUs: () => number = () => 0): VirtualClock {
  let now = startUs;
  let asked = 0;
  const waiting: Waiting[] = [];

  const at = (atUs: number, wake: () => void): Cancel => {
    const entry: Waiting = { atUs: Math.max(now, atUs) + latenessUs(), order: asked++, wake };
    let low = 0;
    let high = waiting.length;
    while (low < high) {
      const middle = (low + high) >>> 1;
      if ((waiting[middle] as Waiting).atUs <= entry.atUs) low = middle + 1;
      else high = middle;
    }
    waiting.splice(low, 0, entry);
    return () => {
      const index = waiting.indexOf(entry);
      if (index >= 0) waiting.splice(index, 1);
    };
  };

  return {
    nowUs: () => now,
    at,
    nextUs: () => waiting[0]?.atUs ?? Number.POSITIVE_INFINITY,
    runTo(untilUs) {
      for (let next = waiting[0]; next !== undefined && next.atUs <= untilUs; next = waiting[0]) {
        waiting.shift();
        now = next.atUs;
        next.wake();
      }
      now = Math.max(now, untilUs);
    },
  };
}
