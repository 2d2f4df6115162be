import { type Clock, US_PER_MS } from '../clock/clock.ts';
import { line, lineTimeUs } from './line.ts';
import {
  type Connection,
  type ConnectionHandlers,
  reopening,
  type ReopeningOptions,
  WRITE_BYTES_MAX,
} from './reopening.ts';
import type { Port, PortFaultCode } from './types.ts';

export interface MemoryPortOptions extends ReopeningOptions {
  /** Speed of the line in both directions, 8N1; null (as by default): bytes arrive at the instant they are sent. */
  readonly baud?: number | null;
  /** How many bytes each receiver gathers before it hands them over, at a baud rate: 1 (as by default) is a UART, 64 a USB packet. */
  readonly chunkBytes?: number;
  /** Time from an attempt to open until the port is open, in milliseconds; 0 by default. */
  readonly openMs?: number;
}

/** What the far end is told, on the clock; never from inside a call to the port or to the far end. */
export interface FarListener {
  /** The near end has opened the pipe: on a real board, the moment DTR rises. */
  opened?(): void;
  /** Valid until it returns. */
  data(bytes: Uint8Array): void;
  /** The near end has let go of the pipe. */
  closed?(): void;
}

/** Changes bytes as they arrive: returns them, changed or not, or fewer, or none. May write into `bytes`. */
export type Corrupt = (bytes: Uint8Array, toward: 'far' | 'near') => Uint8Array;

/** The far end of a memory port: a board, and the hand that pulls its cable. */
export interface FarEnd {
  listen(listener: FarListener): void;
  /** Whether the near end has the pipe open. */
  readonly isOpen: boolean;
  /** Sends to the near end as many of the first bytes as fit, and says how many; 0 while nobody has the pipe open. */
  write(bytes: Uint8Array): number;
  /** Pulls the cable: the near end loses the port, and finds each further attempt refused with `code` until `replug`. */
  unplug(code?: PortFaultCode): void;
  replug(): void;
  /** Takes nothing more: a write of the near end stays in flight, until `release`. */
  block(): void;
  release(): void;
  /** Changes the speed of the line in both directions, from the next byte on. */
  setBaud(baud: number | null): void;
  /** null: bytes arrive as they were sent. */
  corrupt(corrupt: Corrupt | null): void;
}

/** How many bytes can wait on their way to the near end; more are lost, as on a board whose buffer is full. */
const TO_NEAR_BYTES_MAX = 65_536;

/** An in-process pipe: a port whose far end is in the program too. On a virtual clock it does the same every time. */
export function memoryPort(
  clock: Clock,
  address: string,
  options: MemoryPortOptions = {},
): { readonly port: Port; readonly far: FarEnd } {
  let baud = options.baud ?? null;
  let listener: FarListener = { data() {} };
  let corrupt: Corrupt | null = null;
  let refusal: PortFaultCode | null = null;
  /** The near end's handlers while it has the pipe open. */
  let near: ConnectionHandlers | null = null;

  const shared = { clock, baud, chunkBytes: options.chunkBytes ?? 1 };
  const toFar = line({
    ...shared,
    capacityBytes: WRITE_BYTES_MAX,
    deliver(bytes) {
      const arrived = corrupt === null ? bytes : corrupt(bytes, 'far');
      if (arrived.length > 0) listener.data(arrived);
    },
    emptied: () => near?.sent(),
  });
  const toNear = line({
    ...shared,
    capacityBytes: TO_NEAR_BYTES_MAX,
    deliver(bytes) {
      const arrived = corrupt === null ? bytes : corrupt(bytes, 'near');
      if (arrived.length > 0) near?.data(arrived);
    },
    emptied() {},
  });

  const part = (): void => {
    near = null;
    toFar.clear();
    toNear.clear();
    clock.at(clock.nowUs(), () => listener.closed?.());
  };

  const connect = (handlers: ConnectionHandlers): Connection => {
    const cancelOpening = clock.at(clock.nowUs() + (options.openMs ?? 0) * US_PER_MS, () => {
      if (refusal !== null) return handlers.failed(refusal, 'unplugged');
      near = handlers;
      listener.opened?.();
      handlers.opened();
    });
    return {
      write(bytes) {
        if (near === handlers) toFar.send(bytes);
        return lineTimeUs(bytes.length, baud);
      },
      end(_gently, ended) {
        cancelOpening();
        if (near === handlers) part();
        ended();
      },
    };
  };

  const far: FarEnd = {
    listen(to) {
      listener = to;
    },
    get isOpen() {
      return near !== null;
    },
    write: (bytes) => (near === null ? 0 : toNear.send(bytes)),
    unplug(code = 'PORT_MISSING') {
      refusal = code;
      const lost = near;
      if (lost === null) return;
      part();
      clock.at(clock.nowUs(), () => lost.failed('PORT_CLOSED', 'unplugged'));
    },
    replug() {
      refusal = null;
    },
    block: () => toFar.hold(true),
    release: () => toFar.hold(false),
    setBaud(to) {
      baud = to;
      toFar.setBaud(to);
      toNear.setBaud(to);
    },
    corrupt(by) {
      corrupt = by;
    },
  };
  return { port: reopening(clock, address, connect, options), far };
}
