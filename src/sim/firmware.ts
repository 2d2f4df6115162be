/**
 * What runs on a simulated board: it reads the hand, drives the arms and speaks one wire. Loading firmware into a
 * freshly reset board is calling its factory; a reset throws it away.
 */
export interface Firmware {
  /** Boot time is over: says what such firmware says first. */
  start(): void;
  /** Bytes from the bridge, in any portions; valid until it returns. */
  receive(bytes: Uint8Array): void;
  /** Takes one sample of the inputs and sends it, if the firmware has been asked to. */
  sample(): void;
  /** Time from one sample to the next, in microseconds; may change when the bridge asks. */
  readonly samplingUs: number;
}

/** The pins of a board, as its firmware sees them. */
export interface Pins {
  send(bytes: Uint8Array): void;
  /** Since the reset, in integer microseconds. */
  boardUs(): number;
  /** Counts of every input now, in the order of the plan's channels; the array is the board's own. */
  read(): Float64Array;
  /** Pulse of a servo in microseconds from its next refresh on; NaN ends the pulses. */
  pulse(output: number, servo: number, pulseUs: number): void;
  power(output: number, on: boolean): void;
  /** Whether the reading about to be sent, or the command just received, is one of those that get lost. */
  loses(): boolean;
}
