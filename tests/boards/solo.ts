import { virtualClock } from '../../src/clock/virtual.ts';
import type { VirtualClock } from '../../src/clock/virtual.ts';
import { unoBoard } from './uno.ts';
import type { UnoBoard } from './uno.ts';
import { standardFirmata } from './wired.ts';

/** One board on a clock of its own, spoken to byte by byte. */
export interface Solo {
  readonly clock: VirtualClock;
  readonly board: UnoBoard;
  /** Everything it has sent, and when each byte's stop bit ended. */
  readonly heard: number[];
  readonly heardAtUs: number[];
  say(...messages: readonly (readonly number[])[]): void;
  wait(us: number): void;
  /** Widths of the pulses on `pin` that began at `sinceUs` or later. */
  widthsSince(pin: number, sinceUs: number): number[];
}

/** The firmware's greeting is over well before this (it blinks its version on the LED for 1.88 s first). */
export const BOOT_US = 2_000_000;

/** A board switched on at 0 and, unless said otherwise, past its greeting. */
export function solo(bootUs: number = BOOT_US): Solo {
  const clock = virtualClock();
  const heard: number[] = [];
  const heardAtUs: number[] = [];
  const send = (bytes: Uint8Array): void => {
    for (const byte of bytes) {
      heard.push(byte);
      heardAtUs.push(clock.nowUs());
    }
  };
  const board = unoBoard({ clock, flash: standardFirmata, send });
  board.reset();
  clock.runTo(bootUs);
  return {
    clock,
    board,
    heard,
    heardAtUs,
    say: (...messages) => board.receive(Uint8Array.from(messages.flat())),
    wait: (us) => clock.runTo(clock.nowUs() + us),
    widthsSince: (pin, sinceUs) =>
      board
        .pulses(pin)
        .filter((pulse) => pulse.startUs >= sinceUs)
        .map((pulse) => pulse.widthUs),
  };
}

export function median(values: readonly number[]): number {
  const sorted = values.toSorted((a, b) => a - b);
  const middle = sorted.length >> 1;
  const upper = sorted[middle] ?? Number.NaN;
  return sorted.length % 2 === 1 ? upper : ((sorted[middle - 1] ?? Number.NaN) + upper) / 2;
}
