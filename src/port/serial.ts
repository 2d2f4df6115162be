import { type Cancel, type Clock, US_PER_MS } from '../clock/clock.ts';
import type { Address } from './address.ts';
import { detailOf, serialOpenFault } from './faults.ts';
import { lineTimeUs } from './line.ts';
import { watchPresence } from './presence.ts';
import { type Connection, type ConnectionHandlers, reopening, type ReopeningOptions } from './reopening.ts';
import type { Port } from './types.ts';

type SerialAddress = Extract<Address, { kind: 'serial' }>;

/** What is used of serialport's `SerialPort`. */
export interface SerialDevice {
  readonly isOpen: boolean;
  readonly opening: boolean;
  readonly closing: boolean;
  on(event: 'open' | 'close', listener: () => void): unknown;
  on(event: 'data', listener: (bytes: Uint8Array) => void): unknown;
  on(event: 'error', listener: (error: Error) => void): unknown;
  write(bytes: Uint8Array, written: (error?: Error | null) => void): boolean;
  set(lines: { dtr: boolean; rts: boolean; lowLatency: boolean }, done: (error: Error | null) => void): void;
  flush(done: (error: Error | null) => void): void;
  drain(done: (error: Error | null) => void): void;
  close(done: (error: Error | null) => void): void;
}

export interface SerialOpenOptions {
  readonly path: string;
  readonly baudRate: number;
  readonly hupcl: boolean;
}

/** Starts to open a serial port; the device tells by its events how that went. */
export type OpenSerial = (options: SerialOpenOptions) => Promise<SerialDevice>;

export interface SerialPortOptions extends ReopeningOptions {
  /** Baud rate where the address names none: what the wire usually runs at. */
  readonly baudDefault?: number;
  readonly open?: OpenSerial;
}

const GONE = 'the device is gone';

const BAUD_DEFAULT = 115_200;

/** How long draining may take when a port is closed, and how long throwing away what did not leave. */
const DRAIN_US = 200 * US_PER_MS;
const FLUSH_US = 100 * US_PER_MS;

/** A serial port of this machine. */
export function serialPort(address: SerialAddress, clock: Clock, options: SerialPortOptions = {}): Port {
  const { open = openSerial, baudDefault = BAUD_DEFAULT } = options;
  const settings: SerialOpenOptions = {
    path: address.path,
    baudRate: address.baud ?? baudDefault,
    // Letting DTR fall on close would reset most boards, and drop an arm, when the program ends.
    hupcl: false,
  };
  return reopening(clock, address.text, (handlers) => connectSerial(settings, clock, open, handlers), options);
}

/** Only a program that opens a serial port loads the library and its native part. */
async function openSerial(options: SerialOpenOptions): Promise<SerialDevice> {
  const { SerialPort } = await import('serialport');
  return new SerialPort(options);
}

function connectSerial(
  settings: SerialOpenOptions,
  clock: Clock,
  open: OpenSerial,
  handlers: ConnectionHandlers,
): Connection {
  let device: SerialDevice | null = null;
  let isLoading = true;
  let wasOpen = false;
  let leftUs = 0;
  let cancelSent: Cancel | null = null;
  let cancelPresence: Cancel | null = null;
  let onceEnded: (() => void) | null = null;
  let isEmpty = false;
  let isLeaving = false;

  const begin = (opened: SerialDevice): void => {
    device = opened;
    isLoading = false;
    device.on('open', () => {
      wasOpen = true;
      if (onceEnded !== null) return leave();
      cancelPresence = watchPresence(clock, settings.path, () => handlers.failed('PORT_CLOSED', GONE));
      // Each call resets the lines it is not given. A pseudo-terminal has none of them and is a byte pipe all the same.
      opened.set({ dtr: true, rts: true, lowLatency: true }, handlers.opened);
    });
    // A port that nobody reads does not notice that it is unplugged.
    device.on('data', handlers.data);
    device.on('error', (error) => {
      handlers.failed(wasOpen ? 'PORT_CLOSED' : serialOpenFault(error), detailOf(error));
      leave();
    });
    device.on('close', () => {
      handlers.failed('PORT_CLOSED', GONE);
      leave();
    });
  };
  open(settings).then(begin, (error: Error) => {
    isLoading = false;
    handlers.failed('PORT_FAILED', detailOf(error));
    leave();
  });

  // What the library has under way, an opening or a closing of its own, can neither be undone nor done twice: each of
  // its events comes back here.
  const leave = (): void => {
    if (onceEnded === null || isLeaving || isLoading || device?.opening || device?.closing) return;
    isLeaving = true;
    if (device === null || !device.isOpen) return onceEnded();
    if (isEmpty) return device.close(onceEnded);
    const leaving = device;
    within(
      clock,
      FLUSH_US,
      (done) => leaving.flush(done),
      () => {
        isEmpty = true;
        isLeaving = false;
        leave();
      },
    );
  };

  const sent = (): void => {
    cancelSent = null;
    handlers.sent();
  };
  // The system takes a frame at once and sends it at the line's pace. The next one is welcome when this one has left:
  // handed over earlier it would only grow old in the system's queue.
  const written = (error?: Error | null): void => {
    if (error || onceEnded !== null) return;
    if (clock.nowUs() >= leftUs) sent();
    else cancelSent = clock.at(leftUs, sent);
  };

  return {
    write(bytes) {
      const lineUs = lineTimeUs(bytes.length, settings.baudRate);
      leftUs = clock.nowUs() + lineUs;
      device?.write(bytes, written);
      return lineUs;
    },
    end(gently, ended) {
      cancelSent?.();
      cancelPresence?.();
      onceEnded = ended;
      if (!gently || !device?.isOpen) return leave();
      // The last command, which may be the one that ends the pulses, is still to arrive; once it has, nothing is left to
      // throw away. (On a pseudo-terminal that would even take what the other side has not read yet.)
      const { drain } = device;
      within(
        clock,
        DRAIN_US,
        (done) => drain.call(device, done),
        (inTime) => {
          isEmpty = inTime;
          leave();
        },
      );
    },
  };
}

/** Goes on once `step` is done or its time is over, and says which. */
function within(
  clock: Clock,
  limitUs: number,
  step: (done: () => void) => void,
  next: (inTime: boolean) => void,
): void {
  let over = false;
  const goOn = (inTime: boolean): void => {
    if (over) return;
    over = true;
    cancel();
    next(inTime);
  };
  const cancel = clock.at(clock.nowUs() + limitUs, () => goOn(false));
  step(() => goOn(true));
}
