import { setImmediate } from 'node:timers/promises';
import { vi } from 'vitest';

/** Waits for a condition of the real world, looking often and giving up late. */
export async function untilReally(what: string, condition: () => boolean): Promise<void> {
  try {
    await vi.waitUntil(condition, { interval: 2, timeout: 8_000 });
  } catch (cause) {
    throw new Error(`waited in vain for: ${what}`, { cause });
  }
}

/** Turns of the event loop, in each of which the system hands over whatever has come over loopback. */
export async function turnsOfTheLoop(): Promise<void> {
  for (let turn = 0; turn < 50; turn++) await setImmediate();
}

/** What keeps the process alive, counted. */
export function heldByTheProcess(): number {
  return process.getActiveResourcesInfo().length;
}
