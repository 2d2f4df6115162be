/** Why a port is not open. `bridge/words` turns it into a sentence with a remedy. */
export interface PortFault {
  readonly code: PortFaultCode;
  /** The address as the rig writes it. */
  readonly address: string;
  /** What the operating system or library said, for the log. */
  readonly detail: string;
}

export type PortFaultCode =
  /** Held by another program. */
  | 'PORT_BUSY'
  /** No such device, host or path. */
  | 'PORT_MISSING'
  /** No permission. */
  | 'PORT_FORBIDDEN'
  /** Unplugged, or the peer closed. */
  | 'PORT_CLOSED'
  /** Nobody listens there, or no answer. */
  | 'PORT_REFUSED'
  /** A write did not leave within its time. */
  | 'PORT_STALLED'
  /** Anything else the system reports. */
  | 'PORT_FAILED';

/** What a port tells whoever holds it. Called on the event loop, never from inside a call to the port. */
export interface PortListener {
  opened(): void;
  /** Bytes received; the buffer may be reused after the call. */
  data(bytes: Uint8Array): void;
  /** The last write has left: the port can take another. Not said of a write that was lost with its connection. */
  idle(): void;
  /** It could not be opened, or was open and is no more; it is tried again after `retryMs`. */
  closed(fault: PortFault, retryMs: number): void;
}

/** A byte pipe that reopens by itself, with growing pauses, until it is closed. */
export interface Port {
  readonly address: string;
  start(listener: PortListener): void;
  /** True when it is open and no write is in flight. */
  readonly canTake: boolean;
  /**
   * Takes one write of 1 to `WRITE_BYTES_MAX` bytes; false, and nothing taken, unless `canTake`. The bytes are copied
   * or gone when it returns.
   */
  write(bytes: Uint8Array): boolean;
  /**
   * Ends it for good, after the write in flight or 200 ms; resolves when the system has let go, or has not within a
   * second. The listener is told nothing more.
   */
  close(): Promise<void>;
}
