import type { Stats } from 'node:fs';
import { stat } from 'node:fs/promises';
import { type Cancel, type Clock, US_PER_MS } from '../clock/clock.ts';

const EVERY_US = 250 * US_PER_MS;

/**
 * Calls `gone` once when the device file at `path` is no longer the one it is now: a cable was pulled, though perhaps
 * another device has taken its name. Where devices are no files (Windows) it never does.
 *
 * serialport cannot be relied on to tell: on Linux and macOS a read under way at the moment of the unplug returns no
 * bytes, and its reader then asks again without end or pause, at the cost of a core and of all memory
 * (serialport/bindings-cpp issue 162). Only closing the port ends that.
 */
export function watchPresence(clock: Clock, path: string, gone: () => void): Cancel {
  if (!path.startsWith('/')) return () => {};
  let over = false;
  let cancel: Cancel = () => {};
  let first: Stats | null = null;
  const look = (): void => {
    stat(path).then(found, lost);
  };
  const found = (now: Stats): void => {
    first ??= now;
    if (over) return;
    if (now.ino !== first.ino || now.dev !== first.dev || now.rdev !== first.rdev) lost();
    else cancel = clock.at(clock.nowUs() + EVERY_US, look);
  };
  const lost = (): void => {
    if (over) return;
    over = true;
    gone();
  };
  look();
  return () => {
    over = true;
    cancel();
  };
}
