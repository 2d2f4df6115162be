/**
 * The few Firmata messages that these tests say to a board by themselves, built here and not by the project's own wire,
 * so that the firmware is asked by somebody who cannot share the wire's mistakes.
 * Source: firmata/protocol 2.8.0, protocol.md "Message Types" and servos.md.
 */

export const ANALOG_MAPPING_QUERY = [0xf0, 0x69, 0xf7];
export const CAPABILITY_QUERY = [0xf0, 0x6b, 0xf7];

export const MODE = { input: 0, output: 1, analog: 2 } as const;

/** Two 7-bit halves, low half first (protocol.md, "Analog 14-bit data format"). */
const halves = (value: number): number[] => [value & 0x7f, (value >> 7) & 0x7f];

export const pinMode = (pin: number, mode: number): number[] => [0xf4, pin, mode];
export const digitalPort = (port: number, bits: number): number[] => [0x90 | port, ...halves(bits)];
export const digitalPin = (pin: number, high: boolean): number[] => [0xf5, pin, high ? 1 : 0];
export const reportAnalog = (channel: number, on: boolean): number[] => [0xc0 | channel, on ? 1 : 0];
export const samplingInterval = (ms: number): number[] => [0xf0, 0x7a, ...halves(ms), 0xf7];
export const servoConfig = (pin: number, minUs = 544, maxUs = 2400): number[] => [
  0xf0,
  0x70,
  pin,
  ...halves(minUs),
  ...halves(maxUs),
  0xf7,
];
/** Pins above 15 do not fit the short form (servos.md). */
export const position = (pin: number, value: number): number[] =>
  pin < 16 ? [0xe0 | pin, ...halves(value)] : [0xf0, 0x6f, pin, ...halves(value), 0xf7];

/** The analog messages among what a board sent, sysex skipped. */
export function analogReports(bytes: readonly number[]): { channel: number; counts: number }[] {
  const found: { channel: number; counts: number }[] = [];
  for (let at = 0; at < bytes.length; at++) {
    const byte = bytes[at] as number;
    if (byte === 0xf0) {
      const end = bytes.indexOf(0xf7, at);
      if (end < 0) break;
      at = end;
    } else if ((byte & 0xf0) === 0xe0 && at + 2 < bytes.length) {
      found.push({ channel: byte & 0x0f, counts: (bytes[at + 1] as number) + ((bytes[at + 2] as number) << 7) });
      at += 2;
    }
  }
  return found;
}
