import { type Cancel, type Clock, US_PER_S } from '../clock/clock.ts';

/** 8N1: a start bit, eight data bits, a stop bit. */
const BIT_US_PER_BYTE = 10 * US_PER_S;

/** Time that bytes need on a serial line of that baud rate, 8N1, in microseconds, rounded up; 0 where there is no baud rate. */
export function lineTimeUs(bytes: number, baud: number | null): number {
  return baud === null ? 0 : Math.ceil((bytes * BIT_US_PER_BYTE) / baud);
}

export interface LineOptions {
  readonly clock: Clock;
  /** null: everything that waits arrives at once, at the instant it was sent. */
  readonly baud: number | null;
  /** How many bytes the receiver gathers before it hands them over; fewer when no more wait. */
  readonly chunkBytes: number;
  /** How many bytes can wait. */
  readonly capacityBytes: number;
  /** Bytes have arrived; valid until it returns. */
  readonly deliver: (bytes: Uint8Array) => void;
  /** The last byte that waited has been delivered. */
  readonly emptied: () => void;
}

/** One direction of a pipe: bounded, in order, on the clock. */
export interface Line {
  /** Sends as many of the first bytes as fit, and says how many. */
  send(bytes: Uint8Array): number;
  /** Stops the flow where it is (the byte under way is sent anew), or lets it go on. */
  hold(held: boolean): void;
  /** Counts from the next byte on. */
  setBaud(baud: number | null): void;
  /** Throws away what waits. */
  clear(): void;
}

export function line({ clock, chunkBytes, capacityBytes, deliver, emptied, ...first }: LineOptions): Line {
  const ring = new Uint8Array(capacityBytes);
  const chunk = new Uint8Array(capacityBytes);
  let head = 0;
  let waiting = 0;
  let held = false;
  let baud = first.baud;
  let nextBaud = first.baud;
  let cancel: Cancel | null = null;
  let armedBytes = 0;
  // A run is bytes that leave without a gap; instants are counted from its start, so that neither the rounding of one
  // byte nor a timer that fires late moves the bytes after it.
  let runStartUs = 0;
  let runBytes = 0;

  const startRun = (atUs: number, bytes = 0): void => {
    runStartUs = atUs;
    runBytes = bytes;
    baud = nextBaud;
  };

  const arm = (): void => {
    if (cancel !== null || held || waiting === 0) return;
    armedBytes = baud === null ? waiting : Math.min(waiting, chunkBytes);
    cancel = clock.at(runStartUs + lineTimeUs(runBytes + armedBytes, baud), arrive);
  };

  const dueBytes = (): number => {
    if (baud === null) return waiting;
    const gone = Math.floor(((clock.nowUs() - runStartUs) * baud) / BIT_US_PER_BYTE);
    return Math.min(waiting, Math.max(armedBytes, gone - runBytes));
  };

  const take = (bytes: number): Uint8Array => {
    const straight = Math.min(bytes, capacityBytes - head);
    chunk.set(ring.subarray(head, head + straight));
    chunk.set(ring.subarray(0, bytes - straight), straight);
    head = (head + bytes) % capacityBytes;
    waiting -= bytes;
    return chunk.subarray(0, bytes);
  };

  const arrive = (): void => {
    cancel = null;
    const arrived = take(dueBytes());
    runBytes += arrived.length;
    if (baud !== nextBaud) startRun(runStartUs + lineTimeUs(runBytes, baud));
    if (baud !== null && runBytes >= baud) {
      // As many bytes as the baud rate take ten seconds exactly: a run may last for ever and its numbers stay small.
      runBytes -= baud;
      runStartUs += BIT_US_PER_BYTE;
    }
    const last = waiting === 0;
    arm();
    deliver(arrived);
    if (last) emptied();
  };

  const disarm = (): void => {
    cancel?.();
    cancel = null;
  };

  return {
    send(bytes) {
      const taken = Math.min(bytes.length, capacityBytes - waiting);
      // The line has been silent, though a late timer may not yet have delivered what was sent before the silence.
      const nowUs = clock.nowUs();
      if (nowUs >= runStartUs + lineTimeUs(runBytes + waiting, baud)) startRun(nowUs, -waiting);
      const tail = (head + waiting) % capacityBytes;
      const straight = Math.min(taken, capacityBytes - tail);
      ring.set(bytes.subarray(0, straight), tail);
      ring.set(bytes.subarray(straight, taken), 0);
      waiting += taken;
      arm();
      return taken;
    },
    hold(hold) {
      if (hold) disarm();
      else if (held) startRun(clock.nowUs());
      held = hold;
      arm();
    },
    setBaud(to) {
      nextBaud = to;
    },
    clear() {
      disarm();
      waiting = 0;
    },
  };
}
