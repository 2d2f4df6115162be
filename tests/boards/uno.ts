/**
 * An Arduino Uno running real firmware in lockstep with a virtual clock.
 *
 * The chip runs up to the clock's present at each wake-up, and whenever it is spoken to or looked at, so everything from
 * outside meets it at its exact cycle. A slice is shorter than a byte on the line: a byte that the chip began to send
 * during a slice ends after it, and is handed over at its exact microsecond. Not modelled: the boot loader (on a real Uno
 * it adds its own wait after a reset) and the packets of the USB bridge.
 */
import type { Cancel } from '../../src/clock/clock.ts';
import type { VirtualClock } from '../../src/clock/virtual.ts';
import { BITS_PER_BYTE, bootedChip } from './chip.ts';
import type { Chip, Volts } from './chip.ts';
import { pinRecorder } from './pins.ts';
import type { Pins } from './pins.ts';

export interface UnoBoard extends Pins {
  /** Bytes leave the host now; they come down the line at the baud rate, after those still on it. */
  receive(bytes: Uint8Array): void;
  /** What analog input A0..A5 sees from now on: volts, or volts as a function of the instant in microseconds; 0 V until set. */
  setVolts(channel: number, volts: Volts | number): void;
  /** Starts it anew, as opening its port does (DTR): the pins let go, bytes on their way to it are lost. Also powers it on. */
  reset(): void;
  powerOff(): void;
  readonly powered: boolean;
}

export interface UnoOptions {
  readonly clock: VirtualClock;
  /** The firmware's flash image. */
  readonly flash: Uint16Array;
  /** Takes each byte the board sends, at the microsecond its stop bit ends. The array is reused. */
  readonly send: (bytes: Uint8Array) => void;
  /** At which both ends talk; 57600 by default. */
  readonly baud?: number;
  /** How fast its resonator runs; 1, exactly 16 MHz, by default. */
  readonly pace?: number;
}

const BAUD_DEFAULT = 57_600;
/** The board's own divider may be a few percent fast; what is left is still shorter than any byte. */
const SLICE_OF_BYTE = 0.92;
/** More than an operating system would hold for a serial port in these tests. */
const LINE_BYTES_MAX = 16_384;
const ANALOG_INPUTS = 6;

export function unoBoard({ clock, flash, send, baud = BAUD_DEFAULT, pace = 1 }: UnoOptions): UnoBoard {
  const byteUs = (BITS_PER_BYTE * 1e6) / baud;
  const sliceUs = Math.floor(byteUs * SLICE_OF_BYTE);
  const pins = pinRecorder();
  const volts: Volts[] = Array.from({ length: ANALOG_INPUTS }, () => () => 0);
  const sent = new Uint8Array(1);

  let chip: Chip | null = null;
  let lineFreeUs = 0;
  let cancelSlice: Cancel = () => {};

  const catchUp = (): void => chip?.runTo(clock.nowUs());

  const slice = (): void => {
    catchUp();
    cancelSlice = clock.at(clock.nowUs() + sliceUs, slice);
  };

  const sending = (byte: number, endsUs: number): void => {
    if (endsUs < clock.nowUs()) throw new Error(`the firmware sends faster than ${baud} baud`);
    clock.at(Math.ceil(endsUs), () => {
      sent[0] = byte;
      send(sent);
    });
  };

  const powerOff = (): void => {
    catchUp();
    cancelSlice();
    chip = null;
    lineFreeUs = 0;
    pins.letGo(clock.nowUs());
  };

  return {
    level(pin) {
      catchUp();
      return pins.level(pin);
    },
    changes(pin) {
      catchUp();
      return pins.changes(pin);
    },
    pulses(pin) {
      catchUp();
      return pins.pulses(pin);
    },
    get powered() {
      return chip !== null;
    },
    receive(bytes) {
      if (chip === null) return;
      catchUp();
      for (const byte of bytes) {
        lineFreeUs = Math.max(lineFreeUs, clock.nowUs()) + byteUs;
        chip.receiveAt(lineFreeUs, byte);
      }
      if (lineFreeUs - clock.nowUs() > LINE_BYTES_MAX * byteUs) throw new Error('the host writes faster than the line');
    },
    setVolts(channel, value) {
      catchUp();
      volts[channel] = typeof value === 'number' ? () => value : value;
    },
    reset() {
      powerOff();
      chip = bootedChip({ flash, startUs: clock.nowUs(), pace, volts, sending, wrote: pins.wrote });
      slice();
    },
    powerOff,
  };
}
