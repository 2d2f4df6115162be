import type { LinesCommands } from './lines-options.ts';

/**
 * What boards and the bridge say to each other, as data. A wire is pure: it turns bytes into events and frames
 * into bytes, and knows no socket, stream, timer or clock.
 */

/** Everything that is spoken on one port, compiled from the rig. */
export interface BoardPlan {
  /** Refuse a board that says it has another name; null: any board will do. */
  readonly boardName: string | null;
  /** The leader's side, or null when only followers hang on this board. */
  readonly inputs: InputWiring | null;
  /** One entry a follower on this board, in rig order. */
  readonly outputs: readonly OutputWiring[];
}

export interface InputWiring {
  /** The board's channel of each input: the leader's joints in order, then its buttons. */
  readonly channels: readonly number[];
  /** Joint and button names, parallel to `channels`; `lines` matches `name:value` against them. */
  readonly names: readonly string[];
  /** How often the board is asked to sample, where the wire can ask, in milliseconds. */
  readonly samplingMs: number;
}

export interface OutputWiring {
  readonly follower: string;
  /** Joint names, parallel to `Frame.anglesRad`. */
  readonly joints: readonly string[];
  /** Parallel to `Frame.pulsesUs`. */
  readonly servos: readonly ServoWiring[];
  readonly power: PowerWiring | null;
  /** `lines` only: this follower's own texts, where several share a board; absent: those of the `WireChoice`. */
  readonly lines?: LinesCommands;
}

export interface ServoWiring {
  readonly channel: number;
  /** Span of the servo's points, in microseconds. */
  readonly minUs: number;
  readonly maxUs: number;
  /** The joint it turns (the first one, where it turns several): its name in a template. */
  readonly joint: string;
}

export interface PowerWiring {
  readonly channel: number;
  readonly on: 'high' | 'low';
}

/** One command for one follower. The drive owns and reuses it; a wire reads it and writes `sentUs`. */
export interface Frame {
  /** Pulse of each servo, in microseconds, not rounded. */
  readonly pulsesUs: Float64Array;
  /** Pulse of each servo as the wire rounds it; written by `encode`. */
  readonly sentUs: Float64Array;
  /** Angle of each joint, in radians. */
  readonly anglesRad: Float64Array;
  /** How many of the first servos have pulses: fewer than all only while the arm wakes. */
  pulsing: number;
}

/** Why received bytes were thrown away. */
export type Garble = 'checksum' | 'oversize' | 'syntax' | 'count' | 'cut';

/** What a wire has to tell. Objects and buffers are reused: valid until `emit` returns. */
export type WireEvent =
  /**
   * `counts` is parallel to `InputWiring.channels`; NaN where this reading has no value. `boardUs` is the board's own
   * time, going on past the wrap of its counter; NaN if the board has no clock.
   */
  | { readonly kind: 'reading'; readonly counts: Float64Array; readonly boardUs: number }
  /**
   * The greeting is over: readings will come, commands may go. `kept`: the board says that it has been running since
   * before this connection, so its servos still have their pulses; absent where a wire cannot tell.
   */
  | { readonly kind: 'ready'; readonly board: string | null; readonly kept?: boolean }
  /** The board has restarted since it was ready: its servos have no pulses; a new `ready` will follow. */
  | { readonly kind: 'reboot' }
  /** It says it is another board than the profile names. */
  | { readonly kind: 'stranger'; readonly board: string }
  /** Bytes the wire itself has to write now (greeting, configuration). */
  | { readonly kind: 'send'; readonly bytes: Uint8Array }
  | { readonly kind: 'garbled'; readonly bytes: number; readonly why: Garble }
  /** The board sent this many frames that never came whole (each damaged one is also told as `garbled`). */
  | { readonly kind: 'lost'; readonly frames: number }
  /** The board says it has no such channel: what is wired to it stays silent. Told before `ready`, which still comes. */
  | { readonly kind: 'lacks'; readonly what: 'input' | 'output'; readonly channel: number }
  /** An answer to an echo request. */
  | { readonly kind: 'echo'; readonly id: number; readonly boardUs: number };

export type Emit = (event: WireEvent) => void;

/** One wire spoken on one open port. */
export interface WireSession {
  /** A connection has just opened: forget the former one and greet. */
  open(emit: Emit): void;
  push(bytes: Uint8Array, emit: Emit): void;
  /**
   * Called when the board's time to answer is over (2.5 s after opening or after a `reboot`, then each second until
   * ready): ask again, or settle. Does nothing once ready.
   */
  nudge(emit: Emit): void;
  /** Largest `encode`, `limp`, `power` or `echo` of this output, in bytes: the size `out` must have. */
  frameBytesMax(output: number): number;
  /** Writes one command into `out` and the rounded pulses into `frame.sentUs`; returns its length in bytes (0: nothing to send). */
  encode(output: number, frame: Frame, out: Uint8Array): number;
  /** Ends the pulses of an output; 0 bytes if this wire, as configured, cannot. */
  limp(output: number, out: Uint8Array): number;
  /** Switches the output's power; 0 bytes if this wire, as configured, cannot. */
  power(output: number, on: boolean, out: Uint8Array): number;
  /** Asks the board to answer, for timing; `id` 0 to 127. 0 bytes where the wire has no echo. */
  echo(id: number, out: Uint8Array): number;
}

/** What a wire is able to do, for checks before anything moves. */
export interface WireAbility {
  /** One board may carry the leader and followers. */
  readonly bothEnds: boolean;
  /** Pulse step the wire can express, in microseconds. */
  readonly stepUs: number;
  /** Smallest pulse it can carry safely, in microseconds. */
  readonly pulseMinUs: number;
  readonly pulseMaxUs: number;
  /** Channels a servo can have, lowest and highest. */
  readonly servoChannels: readonly [number, number];
  /** Channels an input can have. */
  readonly inputChannels: readonly [number, number];
  /** Most servos of one output. */
  readonly servosMax: number;
  /** Whether it can at all; `lines` needs a text for it (`LinesOptions.limp`, `powerOn`, `powerOff`). */
  readonly canLimp: boolean;
  readonly canPower: boolean;
  /** Baud rate assumed when the address names none. */
  readonly baudDefault: number;
}
