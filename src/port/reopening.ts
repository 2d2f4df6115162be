import { type Cancel, type Clock, US_PER_MS } from '../clock/clock.ts';
import type { Port, PortFaultCode, PortListener } from './types.ts';

/** One opening of one pipe, from `connect` to `end`. Each kind of port provides only this. */
export interface Connection {
  /**
   * Hands one write to the system, then calls `handlers.sent()`, later and once. `bytes` stays untouched until then.
   * Called only between `opened` and `end`, one write at a time.
   * @returns microseconds the line itself needs for it, which the watchdog allows for; 0 where there is no line.
   */
  write(bytes: Uint8Array): number;
  /**
   * Lets go of whatever was opened, at any time, and calls `ended` when the system has. Called once.
   * @param gently what was written is still to arrive; otherwise it is stale and thrown away where that is possible.
   */
  end(gently: boolean, ended: () => void): void;
}

/** What a connection tells; never from inside `connect` or `write`. Whatever comes too late or twice is harmless. */
export interface ConnectionHandlers {
  opened(): void;
  data(bytes: Uint8Array): void;
  sent(): void;
  /** It could not be opened or was lost. */
  failed(code: PortFaultCode, detail: string): void;
}

export type Connect = (handlers: ConnectionHandlers) => Connection;

export interface ReopeningOptions {
  /** How long an opening may take before it counts as refused. */
  readonly connectMs?: number;
  /** How long a write may take, beyond its time on the line, before the port counts as stalled. */
  readonly writeMs?: number;
}

/** First pause before reopening; it doubles with every failure. */
const PAUSE_MS_MIN = 100;
export const PAUSE_MS_MAX = 5_000;
/** A connection that lived this long was a good one: the next pause is the shortest again. */
const STEADY_US = 5_000 * US_PER_MS;
const CONNECT_MS = 5_000;
const WRITE_MS = 500;
/** How long `close` waits for the write in flight, and then for the system to let go. */
const LAST_WRITE_US = 200 * US_PER_MS;
const LET_GO_US = 1_000 * US_PER_MS;

/** Largest single write; a longer or an empty one is a mistake of the caller, not of the field. */
export const WRITE_BYTES_MAX = 16_384;

/** One attempt to open, and what became of it. `connection` is null only while `connect` runs. */
interface Link {
  connection: Connection | null;
  openedUs: number;
  hasEnded: boolean;
}

/**
 * The supervision every kind of port shares: opens, and on failure or loss waits a growing pause and opens again, until
 * `close`. A new connection is opened only when the system has let go of the former one.
 */
export function reopening(clock: Clock, address: string, connect: Connect, options: ReopeningOptions = {}): Port {
  const connectUs = (options.connectMs ?? CONNECT_MS) * US_PER_MS;
  const writeUs = (options.writeMs ?? WRITE_MS) * US_PER_MS;

  let listener: PortListener | null = null;
  /** The attempt that is being opened or is open; everything said by another one comes too late. */
  let link: Link | null = null;
  let open = false;
  let inFlight = false;
  let stallsAtUs = 0;
  let pauseMs = PAUSE_MS_MIN;
  let pausing = false;
  /** The system has not yet let go of the former connection. */
  let ending = false;
  let closing: Promise<void> | null = null;
  let resolveClosing: () => void = nothing;
  /** At most one of: opening's limit, the pause, closing's limits. */
  let cancelTimer: Cancel = nothing;
  let cancelWatch: Cancel | null = null;
  // One write is in flight at a time, so one buffer a connection is enough; a lost connection may still read its own.
  let outgoing = Buffer.alloc(0);
  let outgoingView = outgoing;

  const attempt = (): void => {
    const mine: Link = { connection: null, openedUs: 0, hasEnded: false };
    link = mine;
    cancelTimer = clock.at(clock.nowUs() + connectUs, () => fail(mine, 'PORT_REFUSED', 'no answer'));
    mine.connection = connect({
      opened() {
        if (link !== mine || open) return;
        cancelTimer();
        open = true;
        mine.openedUs = clock.nowUs();
        outgoing = Buffer.alloc(0);
        outgoingView = outgoing;
        listener?.opened();
      },
      data(bytes) {
        if (link === mine && open && closing === null) listener?.data(bytes);
      },
      sent() {
        if (link !== mine || !inFlight) return;
        inFlight = false;
        if (closing === null) listener?.idle();
        else shut();
      },
      failed(code, detail) {
        fail(mine, code, detail);
      },
    });
  };

  const fail = (failed: Link, code: PortFaultCode, detail: string): void => {
    if (link !== failed) return;
    if (closing !== null) return shut();
    const wasSteady = open && clock.nowUs() - failed.openedUs >= STEADY_US;
    const retryMs = wasSteady ? PAUSE_MS_MIN : pauseMs;
    pauseMs = Math.min(2 * retryMs, PAUSE_MS_MAX);
    pausing = true;
    endLink(failed, false);
    cancelTimer = clock.at(clock.nowUs() + retryMs * US_PER_MS, () => {
      pausing = false;
      proceed();
    });
    listener?.closed({ code, address, detail }, retryMs);
  };

  const endLink = (mine: Link, gently: boolean): void => {
    if (mine.connection === null) throw new Error(`${address}: a connection failed from inside connect`);
    cancelTimer();
    cancelWatch?.();
    cancelWatch = null;
    link = null;
    open = false;
    inFlight = false;
    ending = true;
    mine.connection.end(gently, () => {
      if (mine.hasEnded) return;
      mine.hasEnded = true;
      ending = false;
      proceed();
    });
  };

  // A lock that is still held, or a thread that is stuck in the system: opening once more would only add to them.
  const proceed = (): void => {
    if (ending || pausing) return;
    if (closing === null) return attempt();
    cancelTimer();
    resolveClosing();
  };

  const shut = (): void => {
    if (link !== null) endLink(link, open && !inFlight);
    listener = null;
    cancelTimer = clock.at(clock.nowUs() + LET_GO_US, resolveClosing);
    proceed();
  };

  // One wake-up stands for many writes: it looks whether the present one is overdue, and goes on watching if not.
  const watch = (): void => {
    cancelWatch = null;
    if (link === null || !inFlight) return;
    if (clock.nowUs() < stallsAtUs) cancelWatch = clock.at(stallsAtUs, watch);
    else fail(link, 'PORT_STALLED', `a write did not leave within ${writeUs / US_PER_MS} ms`);
  };

  return {
    address,
    start(to) {
      if (listener !== null || closing !== null) throw new Error(`${address} was started or closed before`);
      listener = to;
      cancelTimer = clock.at(clock.nowUs(), attempt);
    },
    get canTake() {
      return open && !inFlight && closing === null;
    },
    write(bytes) {
      if (bytes.length < 1 || bytes.length > WRITE_BYTES_MAX) {
        throw new RangeError(`${address}: a write takes 1 to ${WRITE_BYTES_MAX} bytes, not ${bytes.length}`);
      }
      const connection = link?.connection;
      if (!connection || !open || inFlight || closing !== null) return false;
      if (outgoing.length < bytes.length) outgoing = Buffer.alloc(bytes.length);
      if (outgoingView.length !== bytes.length || outgoingView.buffer !== outgoing.buffer) {
        outgoingView = outgoing.subarray(0, bytes.length);
      }
      outgoingView.set(bytes);
      inFlight = true;
      stallsAtUs = clock.nowUs() + writeUs + connection.write(outgoingView);
      cancelWatch ??= clock.at(stallsAtUs, watch);
      return true;
    },
    close() {
      if (closing !== null) return closing;
      closing = new Promise((resolve) => {
        resolveClosing = resolve;
      });
      cancelTimer();
      pausing = false;
      if (inFlight) cancelTimer = clock.at(clock.nowUs() + LAST_WRITE_US, shut);
      else shut();
      return closing;
    },
  };
}

function nothing(): void {}
