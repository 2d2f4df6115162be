import {
  ANALOG,
  ANALOG_MAPPING,
  ANALOG_MAPPING_QUERY,
  DIGITAL,
  EXTENDED_ANALOG,
  FIRMWARE,
  PIN_MODE,
  PIN_STATE,
  PIN_STATE_QUERY,
  REPORT_ANALOG,
  SAMPLING_INTERVAL,
  SERVO_CONFIG,
  SYSEX,
  SYSEX_END,
  VERSION,
} from './firmata-messages.ts';
import type { FirmataReader } from './firmata-reader.ts';

/**
 * The board's side of what this wire uses of Firmata: for simulated boards and for tests. It may allocate.
 */

/** What a board says. */
export type FromFirmataBoard =
  | { readonly kind: 'version'; readonly major: number; readonly minor: number }
  | { readonly kind: 'firmware'; readonly major: number; readonly minor: number; readonly name: string }
  /** The channel of each pin; null where it has none. */
  | { readonly kind: 'mapping'; readonly channels: readonly (number | null)[] }
  | { readonly kind: 'analog'; readonly channel: number; readonly count: number }
  | { readonly kind: 'pinState'; readonly pin: number; readonly mode: number; readonly state: number };

/** What a board hears. */
export type FromFirmataHost =
  | { readonly kind: 'askVersion' }
  | { readonly kind: 'askFirmware' }
  | { readonly kind: 'askMapping' }
  | { readonly kind: 'askPinState'; readonly pin: number }
  | { readonly kind: 'sampling'; readonly ms: number }
  | { readonly kind: 'pinMode'; readonly pin: number; readonly mode: number }
  | { readonly kind: 'report'; readonly channel: number; readonly on: boolean }
  | { readonly kind: 'servoConfig'; readonly pin: number; readonly minUs: number; readonly maxUs: number }
  | { readonly kind: 'analog'; readonly pin: number; readonly value: number }
  | { readonly kind: 'digital'; readonly port: number; readonly bits: number };

export function encodeFromFirmataBoard(message: FromFirmataBoard): Uint8Array {
  switch (message.kind) {
    case 'version':
      return Uint8Array.of(VERSION, message.major, message.minor);
    case 'firmware': {
      const name = [...new TextEncoder().encode(message.name)].flatMap(split);
      return Uint8Array.of(SYSEX, FIRMWARE, message.major, message.minor, ...name, SYSEX_END);
    }
    case 'mapping':
      return Uint8Array.of(SYSEX, ANALOG_MAPPING, ...message.channels.map((channel) => channel ?? 0x7f), SYSEX_END);
    case 'analog':
      return message.channel < 16
        ? Uint8Array.of(ANALOG | message.channel, ...split(message.count))
        : Uint8Array.of(SYSEX, EXTENDED_ANALOG, message.channel, ...split(message.count), SYSEX_END);
    case 'pinState':
      return Uint8Array.of(SYSEX, PIN_STATE, message.pin, message.mode, ...split(message.state), SYSEX_END);
  }
}

/** Reads a message that `firmataReader('host')` found; null for one that this wire never sends. */
export function decodeFromFirmataHost({ command, channel, data, length }: FirmataReader): FromFirmataHost | null {
  const [first = 0, second = 0] = data;
  switch (command) {
    case VERSION:
      return { kind: 'askVersion' };
    case PIN_MODE:
      return { kind: 'pinMode', pin: first, mode: second };
    case REPORT_ANALOG:
      return { kind: 'report', channel, on: first !== 0 };
    case ANALOG:
      return { kind: 'analog', pin: channel, value: join(first, second) };
    case DIGITAL:
      return { kind: 'digital', port: channel, bits: join(first, second) };
    case SYSEX:
      return decodeSysex(data.subarray(0, length));
    default:
      return null;
  }
}

function decodeSysex([feature, ...body]: Uint8Array): FromFirmataHost | null {
  const [a = 0, b = 0, c = 0, d = 0, e = 0] = body;
  switch (feature) {
    case FIRMWARE:
      return { kind: 'askFirmware' };
    case ANALOG_MAPPING_QUERY:
      return { kind: 'askMapping' };
    case PIN_STATE_QUERY:
      return { kind: 'askPinState', pin: a };
    case SAMPLING_INTERVAL:
      return { kind: 'sampling', ms: join(a, b) };
    case SERVO_CONFIG:
      return { kind: 'servoConfig', pin: a, minUs: join(b, c), maxUs: join(d, e) };
    case EXTENDED_ANALOG:
      return { kind: 'analog', pin: a, value: join(b, c) };
    default:
      return null;
  }
}

function split(value: number): [number, number] {
  return [value & 0x7f, (value >>> 7) & 0x7f];
}

function join(low: number, high: number): number {
  return low | (high << 7);
}
