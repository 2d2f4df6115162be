import type { VirtualClock } from '../../src/clock/virtual.ts';
import { memoryPort } from '../../src/port/memory.ts';
import type { FarEnd, MemoryPortOptions } from '../../src/port/memory.ts';
import type { Port } from '../../src/port/types.ts';
import { firmwareHex } from '../../tools/firmware.ts';
import { flashImage } from './hex.ts';
import { unoBoard } from './uno.ts';
import type { UnoBoard, UnoOptions } from './uno.ts';

/** StandardFirmata for the Uno. */
export const standardFirmata = flashImage(await firmwareHex());

/** A board behind a port, as behind a USB cable that also powers it. */
export interface WiredBoard {
  readonly port: Port;
  readonly board: UnoBoard;
  /** The board's end of the pipe, to block it, or to change bytes on their way. */
  readonly far: FarEnd;
  /** Pulls the cable: the port is lost and the board is off. */
  unplug(): void;
  /** The port can be opened again, which starts the board. */
  replug(): void;
}

/** @param options no `baud`: the line is the board's own, and the port is what an operating system offers, which buffers. */
export function wiredBoard(
  clock: VirtualClock,
  address: string,
  options: Omit<MemoryPortOptions, 'baud' | 'chunkBytes'> & Pick<UnoOptions, 'pace'> = {},
): WiredBoard {
  const { port, far } = memoryPort(clock, address, options);
  const { pace = 1 } = options;
  const board = unoBoard({ clock, pace, flash: standardFirmata, send: (bytes) => far.write(bytes) });
  // Opening raises DTR, which resets an Uno. Closing leaves it powered: its servos go on being pulsed.
  far.listen({ opened: () => board.reset(), data: (bytes) => board.receive(bytes) });
  return {
    port,
    board,
    far,
    unplug() {
      board.powerOff();
      far.unplug();
    },
    replug: () => far.replug(),
  };
}
