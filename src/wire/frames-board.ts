import {
  BOARD_HEAD,
  FROM_BOARD,
  FROM_HOST,
  FRAMES_VERSION,
  HELLO_HEAD,
  HELLO_NAME_MAX,
  HELLO_PULSING,
  HELLO_STARTED,
  HOST_HEAD,
  NO_COUNT,
  PAYLOAD_BYTES_MAX,
  PULSE_STEPS_PER_US,
  READINGS_HEAD,
  READINGS_MAX,
  SERVO_BYTES,
  seal,
  u16,
} from './frames-layout.ts';

/**
 * The board's side of `frames`, as firmware would have it: for simulated boards and for tests. It may allocate.
 */

/** What a board says. */
export type FromBoard =
  | {
      readonly kind: 'hello';
      /** True when the board has just started, false when it was asked. */
      readonly started: boolean;
      /** Whether a servo has pulses; absent: no. */
      readonly pulsing?: boolean;
      readonly inputs: number;
      readonly outputs: number;
      /** At most 32 bytes of UTF-8. */
      readonly name: string;
    }
  | {
      readonly kind: 'readings';
      readonly firstChannel: number;
      /** 0 to 65534 each; NaN: no value. */
      readonly counts: ArrayLike<number>;
    }
  | { readonly kind: 'echo'; readonly id: number };

/** What a board hears. */
export type FromHost =
  | { readonly kind: 'hello' }
  | { readonly kind: 'command'; readonly channels: readonly number[]; readonly pulsesUs: readonly number[] }
  | { readonly kind: 'limp'; readonly channels: readonly number[] }
  | { readonly kind: 'power'; readonly channel: number; readonly high: boolean }
  | { readonly kind: 'echo'; readonly id: number };

/** Writes one frame into `out` (`FRAME_BYTES_MAX` bytes are always enough); returns its length. */
export function encodeFromBoard(message: FromBoard, sequence: number, timeUs: number, out: Uint8Array): number {
  const payload = new Uint8Array(PAYLOAD_BYTES_MAX);
  const view = new DataView(payload.buffer);
  payload[0] = FROM_BOARD[message.kind];
  payload[1] = sequence;
  view.setUint32(2, timeUs % 2 ** 32, true);
  let length = BOARD_HEAD;
  if (message.kind === 'hello') {
    const name = new TextEncoder().encode(message.name).subarray(0, HELLO_NAME_MAX);
    const flags = (message.started ? HELLO_STARTED : 0) | (message.pulsing === true ? HELLO_PULSING : 0);
    payload.set([FRAMES_VERSION, flags, message.inputs, message.outputs], BOARD_HEAD);
    payload.set(name, HELLO_HEAD);
    length = HELLO_HEAD + name.length;
  } else if (message.kind === 'readings') {
    const { counts } = message;
    if (counts.length > READINGS_MAX) throw new RangeError(`one frame holds at most ${READINGS_MAX} readings`);
    payload[BOARD_HEAD] = message.firstChannel;
    for (let index = 0; index < counts.length; index++) {
      const count = counts[index] as number;
      view.setUint16(READINGS_HEAD + 2 * index, Number.isNaN(count) ? NO_COUNT : count, true);
    }
    length = READINGS_HEAD + 2 * counts.length;
  } else {
    view.setUint16(BOARD_HEAD, message.id, true);
    length = BOARD_HEAD + 2;
  }
  return seal(payload, length, out, 0);
}

/** Reads a payload that `frameReader` found; null when it is nothing a board must understand. */
export function decodeFromHost(payload: Uint8Array, length: number): FromHost | null {
  const body = payload.subarray(HOST_HEAD, length);
  switch (payload[0]) {
    case FROM_HOST.hello:
      return body.length === 0 ? { kind: 'hello' } : null;
    case FROM_HOST.command: {
      if (body.length % SERVO_BYTES !== 0) return null;
      const starts = Array.from({ length: body.length / SERVO_BYTES }, (_, servo) => servo * SERVO_BYTES);
      return {
        kind: 'command',
        channels: starts.map((at) => body[at] as number),
        pulsesUs: starts.map((at) => u16(body, at + 1) / PULSE_STEPS_PER_US),
      };
    }
    case FROM_HOST.limp:
      return { kind: 'limp', channels: [...body] };
    case FROM_HOST.power:
      return body.length === 2 ? { kind: 'power', channel: body[0] as number, high: body[1] !== 0 } : null;
    case FROM_HOST.echo:
      return body.length === 2 ? { kind: 'echo', id: u16(body, 0) } : null;
    default:
      return null;
  }
}
