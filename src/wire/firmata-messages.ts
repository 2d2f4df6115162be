/**
 * Bytes of the Firmata protocol that this wire uses (firmata/protocol, protocol.md and servos.md, 2.8.0).
 */
export const ANALOG = 0xe0;
export const DIGITAL = 0x90;
export const REPORT_ANALOG = 0xc0;
export const SYSEX = 0xf0;
export const PIN_MODE = 0xf4;
export const SYSEX_END = 0xf7;
export const VERSION = 0xf9;

export const ANALOG_MAPPING_QUERY = 0x69;
export const ANALOG_MAPPING = 0x6a;
export const PIN_STATE_QUERY = 0x6d;
export const PIN_STATE = 0x6e;
export const EXTENDED_ANALOG = 0x6f;
export const SERVO_CONFIG = 0x70;
export const FIRMWARE = 0x79;
export const SAMPLING_INTERVAL = 0x7a;

export const MODE_OUTPUT = 0x01;
/** protocol.md names 0x03 in one place; its own list of modes, and every firmware, has 0x02. */
export const MODE_ANALOG = 0x02;
/** In an analog mapping: this pin has no channel. */
export const NO_CHANNEL = 0x7f;

/** Pins above this do not fit the short analog message. */
const SHORT_PIN_MAX = 15;
export const SERVO_CONFIG_BYTES = 8;
export const PIN_MODE_BYTES = 3;
export const DIGITAL_BYTES = 3;
export const PIN_STATE_QUERY_BYTES = 4;

/** Bytes of one analog message to this pin. */
export function analogBytes(pin: number): number {
  return pin > SHORT_PIN_MAX ? 6 : 3;
}

/** Writes a 14-bit value to a pin, low seven bits first; returns where the message ended. */
export function putAnalog(pin: number, value: number, out: Uint8Array, from: number): number {
  let at = from;
  const extended = pin > SHORT_PIN_MAX;
  if (extended) {
    out[at++] = SYSEX;
    out[at++] = EXTENDED_ANALOG;
    out[at++] = pin;
  } else {
    out[at++] = ANALOG | pin;
  }
  out[at++] = value & 0x7f;
  out[at++] = (value >>> 7) & 0x7f;
  if (extended) out[at++] = SYSEX_END;
  return at;
}

/** Configures a servo pin, which also starts its pulses. */
export function putServoConfig(pin: number, minUs: number, maxUs: number, out: Uint8Array, at: number): number {
  out[at] = SYSEX;
  out[at + 1] = SERVO_CONFIG;
  out[at + 2] = pin;
  out[at + 3] = minUs & 0x7f;
  out[at + 4] = (minUs >>> 7) & 0x7f;
  out[at + 5] = maxUs & 0x7f;
  out[at + 6] = (maxUs >>> 7) & 0x7f;
  out[at + 7] = SYSEX_END;
  return at + SERVO_CONFIG_BYTES;
}

export function putPinMode(pin: number, mode: number, out: Uint8Array, at: number): number {
  out[at] = PIN_MODE;
  out[at + 1] = pin;
  out[at + 2] = mode;
  return at + PIN_MODE_BYTES;
}

/** Sets the eight pins of a port at once. */
export function putDigital(port: number, bits: number, out: Uint8Array, at: number): number {
  out[at] = DIGITAL | port;
  out[at + 1] = bits & 0x7f;
  out[at + 2] = (bits >>> 7) & 0x01;
  return at + DIGITAL_BYTES;
}
