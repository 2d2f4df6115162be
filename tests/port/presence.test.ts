import { mkdtempSync, renameSync, rmSync, symlinkSync, writeFileSync } from 'node:fs';
import { stat } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { type VirtualClock, virtualClock } from '../../src/clock/virtual.ts';
import { watchPresence } from '../../src/port/presence.ts';
import { turnsOfTheLoop, untilReally } from './real-time.ts';

let folder: string;
let device: string;
let link: string;
let clock: VirtualClock;
let told: number;

beforeEach(() => {
  folder = mkdtempSync(join(tmpdir(), 'eidograph-port-'));
  device = join(folder, 'ttyACM0');
  link = join(folder, 'by-id');
  writeFileSync(device, '');
  symlinkSync(device, link);
  clock = virtualClock();
  told = 0;
});
afterEach(() => rmSync(folder, { recursive: true }));

const gone = (): void => void told++;
/** The file system answers in its own time; the watch then asks the clock for its next look. */
const looked = (): Promise<void> => untilReally('a look', () => told > 0 || clock.nextUs() < Number.POSITIVE_INFINITY);
const look = async (): Promise<void> => {
  clock.runTo(clock.nextUs());
  await looked();
};

describe('the watch over a device file', () => {
  it('says nothing while it is there', async () => {
    const cancel = watchPresence(clock, link, gone);
    for (let i = 0; i < 5; i++) {
      await looked();
      expect(clock.nextUs()).toBe((i + 1) * 250_000);
      clock.runTo(clock.nextUs());
    }
    await looked();
    cancel();
    expect(told).toBe(0);
    expect(clock.nextUs(), 'no wake-up is left').toBe(Number.POSITIVE_INFINITY);
  });

  it('says once that it is gone, and looks no more', async () => {
    watchPresence(clock, link, gone);
    await looked();
    rmSync(device);
    await look();
    expect(told).toBe(1);
    expect(clock.nextUs()).toBe(Number.POSITIVE_INFINITY);
  });

  it('says so too when another device has taken its name', async () => {
    watchPresence(clock, link, gone);
    await looked();
    writeFileSync(`${device}.new`, '');
    renameSync(`${device}.new`, device);
    await look();
    expect(told).toBe(1);
  });

  it('says nothing after it was cancelled, even in the middle of a look', async () => {
    const cancel = watchPresence(clock, link, gone);
    await looked();
    rmSync(device);
    clock.runTo(clock.nextUs());
    cancel();
    await expect(stat(device)).rejects.toThrow('ENOENT');
    await turnsOfTheLoop();
    expect(told).toBe(0);
    expect(clock.nextUs()).toBe(Number.POSITIVE_INFINITY);
  });

  it('is not kept where devices are no files', () => {
    watchPresence(clock, 'COM3', gone)();
    expect(clock.nextUs()).toBe(Number.POSITIVE_INFINITY);
    expect(told).toBe(0);
  });
});
