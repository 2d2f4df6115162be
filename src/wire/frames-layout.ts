import { cobsBytesMax, cobsDecode, cobsEncode } from './cobs.ts';
import { crc16 } from './crc16.ts';
import type { Garble } from './types.ts';

/**
 * The `frames` wire, byte by byte (README.md says the same in prose). A payload is type, sequence number, body, CRC;
 * it is stuffed and ended by a zero. Numbers are little-endian.
 */
export const FRAMES_VERSION = 1;

/** Payload with CRC. Below 254, so that stuffing always costs exactly one byte and firmware needs one small buffer. */
export const PAYLOAD_BYTES_MAX = 250;
/** A payload as it travels: stuffed, with the zero at its end. */
export const FRAME_BYTES_MAX = cobsBytesMax(PAYLOAD_BYTES_MAX) + 1;

export const FROM_BOARD = { hello: 0x01, readings: 0x02, echo: 0x03 } as const;
export const FROM_HOST = { hello: 0x41, command: 0x42, limp: 0x43, power: 0x44, echo: 0x45 } as const;

const CRC_BYTES = 2;
/** Type and sequence number. */
export const HOST_HEAD = 2;
/** Type, sequence number, board time. */
export const BOARD_HEAD = 6;
/** Version, flags, inputs, outputs; the name follows. */
export const HELLO_HEAD = BOARD_HEAD + 4;
export const HELLO_NAME_MAX = 32;
/** Flag: said unasked, because the board has just started. */
export const HELLO_STARTED = 0x01;
/** Flag: at least one servo has pulses. */
export const HELLO_PULSING = 0x02;
/** First channel; the counts follow. */
export const READINGS_HEAD = BOARD_HEAD + 1;
/** A count that says "no value". */
export const NO_COUNT = 0xffff;
/** Channel and pulse of one servo. */
export const SERVO_BYTES = 3;
export const PULSE_STEPS_PER_US = 8;

export const READINGS_MAX = Math.floor((PAYLOAD_BYTES_MAX - CRC_BYTES - READINGS_HEAD) / 2);
export const SERVOS_MAX = Math.floor((PAYLOAD_BYTES_MAX - CRC_BYTES - HOST_HEAD) / SERVO_BYTES);

/** Bytes on the wire of a payload with this many bytes before its CRC. */
export function sealedBytes(length: number): number {
  return cobsBytesMax(length + CRC_BYTES) + 1;
}

/** Bytes on the wire of a command for this many servos. */
export function commandBytes(servos: number): number {
  return sealedBytes(HOST_HEAD + servos * SERVO_BYTES);
}

/** Adds the CRC behind `payload[0..length)`, stuffs both into `out` from `at` and ends them; returns where it ended. */
export function seal(payload: Uint8Array, length: number, out: Uint8Array, at: number): number {
  const crc = crc16(payload, 0, length);
  payload[length] = crc & 0xff;
  payload[length + 1] = crc >>> 8;
  const end = cobsEncode(payload, length + CRC_BYTES, out, at);
  out[end] = 0;
  return end + 1;
}

export function u16(bytes: Uint8Array, at: number): number {
  return (bytes[at] as number) | ((bytes[at + 1] as number) << 8);
}

export function u32(bytes: Uint8Array, at: number): number {
  return (u16(bytes, at) | (u16(bytes, at + 2) << 16)) >>> 0;
}

/** Finds frames in a stream of bytes; the same for either side. */
export interface FrameReader {
  /** Reads on from `at` until one frame ended or the bytes did; returns where. Then look at `found`. */
  read(bytes: Uint8Array, at: number): number;
  found: 'nothing' | 'frame' | 'garbled';
  /** With `frame`: `payload[0..length)`, type first, CRC checked and taken off. Valid until the next `read`. */
  readonly payload: Uint8Array;
  length: number;
  /** With `garbled`: how many bytes went, and why. */
  bytes: number;
  why: Garble;
  /** Forgets a frame in progress. */
  reset(): void;
}

export function frameReader(): FrameReader {
  const stuffed = new Uint8Array(FRAME_BYTES_MAX);
  const payload = new Uint8Array(FRAME_BYTES_MAX);
  let filled = 0;
  let dropping = false;

  const garble = (bytes: number, why: Garble): void => {
    reader.found = 'garbled';
    reader.bytes = bytes;
    reader.why = why;
  };

  const finish = (): void => {
    const bytes = filled + 1;
    filled = 0;
    const length = cobsDecode(stuffed, bytes - 1, payload);
    if (length < HOST_HEAD + CRC_BYTES) return garble(bytes, 'cut');
    if (crc16(payload, 0, length - CRC_BYTES) !== u16(payload, length - CRC_BYTES)) return garble(bytes, 'checksum');
    reader.found = 'frame';
    reader.length = length - CRC_BYTES;
  };

  const reader: FrameReader = {
    found: 'nothing',
    payload,
    length: 0,
    bytes: 0,
    why: 'cut',
    reset() {
      filled = 0;
      dropping = false;
    },
    read(bytes, from) {
      reader.found = 'nothing';
      for (let at = from; at < bytes.length; at++) {
        const byte = bytes[at] as number;
        if (byte !== 0) {
          if (filled === FRAME_BYTES_MAX - 1) {
            // Told in portions, so that a stream without any zero is noticed too.
            garble(filled, 'oversize');
            filled = 0;
            dropping = true;
            return at;
          }
          stuffed[filled++] = byte;
          continue;
        }
        if (dropping) {
          dropping = false;
          garble(filled + 1, 'oversize');
          filled = 0;
          return at + 1;
        }
        // Zeros in a row are allowed: a sender may put one in front to end whatever noise came before.
        if (filled > 0) {
          finish();
          return at + 1;
        }
      }
      return bytes.length;
    },
  };
  return reader;
}
