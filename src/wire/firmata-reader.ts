import { ANALOG, DIGITAL, SYSEX, SYSEX_END, VERSION } from './firmata-messages.ts';
import type { Garble } from './types.ts';

/** Longest sysex that is read: an analog mapping of 128 pins, or a firmware name of 126 characters. */
export const SYSEX_BYTES_MAX = 256;

const UNKNOWN = 0xffff;
const ENDLESS = 0xfffe;
/** Data bytes that follow each status byte of a board. */
const NEEDS = new Uint16Array(256).fill(UNKNOWN);
for (const command of [ANALOG, DIGITAL]) NEEDS.fill(2, command, command + 16);
NEEDS[VERSION] = 2;
NEEDS[SYSEX] = ENDLESS;

/** Finds the messages in what a Firmata board sends. */
export interface FirmataReader {
  /** Reads on from `at` until one message ended or the bytes did; returns where. Then look at `found`. */
  read(bytes: Uint8Array, at: number): number;
  found: 'nothing' | 'message' | 'garbled';
  /** With `message`: its first byte without the channel, e.g. 0xE0, 0xF0 for a sysex. */
  command: number;
  /** Channel or port of the short messages, else 0. */
  channel: number;
  /** `data[0..length)`: the two or fewer data bytes, or a sysex from its feature byte on. Valid until the next `read`. */
  readonly data: Uint8Array;
  length: number;
  /** With `garbled`: how many bytes went, and why. */
  bytes: number;
  why: Garble;
  /** Forgets a message in progress. */
  reset(): void;
}

export function firmataReader(): FirmataReader {
  const data = new Uint8Array(SYSEX_BYTES_MAX);
  /** Status byte of the message in progress, 0 between messages. */
  let status = 0;
  let dropping = false;
  let orphans = 0;

  const garble = (bytes: number, why: Garble): void => {
    reader.found = 'garbled';
    reader.bytes = bytes;
    reader.why = why;
  };

  const finish = (): void => {
    reader.found = 'message';
    reader.command = status < SYSEX ? status & 0xf0 : status;
    reader.channel = status < SYSEX ? status & 0x0f : 0;
    status = 0;
  };

  const overflowed = (): void => {
    garble(reader.length, 'oversize');
    reader.reset();
  };

  /** A status byte in the midst of a message: what came before is lost, and the byte itself is read again. */
  const cutShort = (): void => {
    if (dropping) return overflowed();
    if (orphans > 0) garble(orphans, 'syntax');
    else garble(reader.length + 1, 'cut');
    reader.reset();
  };

  const begin = (byte: number): void => {
    status = byte;
    reader.length = 0;
    if (NEEDS[byte] !== UNKNOWN) return;
    status = 0;
    orphans = 1;
  };

  const take = (byte: number): void => {
    if (status === 0) {
      orphans++;
      return;
    }
    if (status === SYSEX && reader.length === SYSEX_BYTES_MAX) {
      garble(reader.length, 'oversize');
      reader.length = 0;
      dropping = true;
    }
    data[reader.length++] = byte;
    if (reader.length === NEEDS[status]) finish();
  };

  const reader: FirmataReader = {
    found: 'nothing',
    command: 0,
    channel: 0,
    data,
    length: 0,
    bytes: 0,
    why: 'cut',
    reset() {
      status = 0;
      reader.length = 0;
      dropping = false;
      orphans = 0;
    },
    read(bytes, start) {
      reader.found = 'nothing';
      for (let at = start; at < bytes.length; at++) {
        const byte = bytes[at] as number;
        if (byte < 0x80) {
          take(byte);
        } else if (byte === SYSEX_END && status === SYSEX) {
          if (dropping) overflowed();
          else finish();
        } else if (status !== 0 || orphans > 0) {
          cutShort();
          return at;
        } else {
          begin(byte);
        }
        if (orphans === SYSEX_BYTES_MAX) cutShort();
        if (reader.found !== 'nothing') return at + 1;
      }
      return bytes.length;
    },
  };
  return reader;
}
