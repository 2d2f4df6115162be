import type { LinesOptions } from './lines-options.ts';
import type { InputWiring } from './types.ts';

/**
 * Reads the numbers of one text line straight from its bytes: no strings, nothing allocated.
 * A line is columns (`512, 300`) or names with values (`shoulder:512 elbow:300`), not both.
 */
export interface LineParser {
  /** Parallel to the wiring's channels; what the last good line said. NaN: no value. */
  readonly counts: Float64Array;
  /** Reads `line[0..end)`: how many inputs it gave a value, or why it is bad. A bad line changes nothing. */
  parse(line: Uint8Array, end: number): number | 'syntax' | 'checksum';
  /** Forgets former values. */
  reset(): void;
}

const NONE = 0;
/** Space and tab: skipped around numbers, and where nothing else is asked for also what splits them. */
const SOFT = 1;
/** Splits always: two in a row leave a column without a value. */
const HARD = 2;

const PLUS = 0x2b;
const MINUS = 0x2d;
const POINT = 0x2e;
const ZERO = 0x30;
const COLON = 0x3a;
const STAR = 0x2a;
/** More decimals than this change nothing that a converter can read, and 10^15 still divides exactly. */
const DECIMALS_MAX = 15;
const POWERS = Float64Array.from({ length: DECIMALS_MAX + 1 }, (_, exponent) => 10 ** exponent);

/** Whether a text can be `LinesOptions.separator`: one ASCII character that no number, name or checksum contains. */
export function canSeparate(text: string): boolean {
  return /^[\t -~]$/.test(text) && !/[A-Za-z0-9_+.:*-]/.test(text);
}

export function lineParser(
  wiring: InputWiring,
  options: Pick<LinesOptions, 'separator' | 'sends' | 'checksum'>,
): LineParser {
  const inputs = wiring.channels.length;
  const kinds = byteKinds(options.separator);
  const softSplits = options.separator === null || options.separator === ' ';
  const names = wiring.names.map((name) => new TextEncoder().encode(name));
  const inputOfColumn = new Int16Array(Math.max(-1, ...wiring.channels) + 1).fill(-1);
  wiring.channels.forEach((channel, input) => (inputOfColumn[channel] = input));

  const counts = new Float64Array(inputs).fill(Number.NaN);
  /** Values of the line in hand; the last place takes what nobody asked for. */
  const fresh = new Float64Array(inputs + 1);
  const { checksum } = options;

  const skipSoft = (line: Uint8Array, from: number, end: number): number => {
    let at = from;
    while (at < end && kinds[line[at] as number] === SOFT) at++;
    return at;
  };

  const inputNamed = (line: Uint8Array, from: number, end: number): number => {
    for (let input = 0; input < names.length; input++) {
      const name = names[input] as Uint8Array;
      if (name.length !== end - from) continue;
      let same = 0;
      while (same < name.length && name[same] === line[from + same]) same++;
      if (same === name.length) return input;
    }
    return -1;
  };

  /** Where the colon of this field is, or -1. */
  const colonOf = (line: Uint8Array, from: number, end: number): number => {
    for (let at = from; at < end && kinds[line[at] as number] === NONE; at++) {
      if (line[at] === COLON) return at;
    }
    return -1;
  };

  /** Reads a number into `fresh[input]`; returns where it ended, or -1. */
  const number = (line: Uint8Array, from: number, end: number, input: number): number => {
    let at = from;
    const sign = line[at] === MINUS ? -1 : 1;
    if (line[at] === MINUS || line[at] === PLUS) at++;
    let value = 0;
    let digits = 0;
    let decimals = -1;
    for (; at < end; at++) {
      const byte = line[at] as number;
      const digit = byte - ZERO;
      if (digit >= 0 && digit <= 9) {
        digits++;
        if (decimals >= DECIMALS_MAX) continue;
        value = value * 10 + digit;
        if (decimals >= 0) decimals++;
      } else if (byte === POINT && decimals < 0) decimals = 0;
      else break;
    }
    if (digits === 0) return -1;
    fresh[input < 0 ? inputs : input] = (sign * value) / (decimals > 0 ? (POWERS[decimals] as number) : 1);
    return at;
  };

  /** The line without its checksum, or -1 when that is absent or wrong. */
  const checked = (line: Uint8Array, end: number): number => {
    const star = end - 3;
    if (star < 0 || line[star] !== STAR) return -1;
    let sum = 0;
    for (let at = 0; at < star; at++) {
      sum = checksum === 'xor' ? sum ^ (line[at] as number) : (sum + (line[at] as number)) & 0xff;
    }
    return sum === hexDigit(line[star + 1] as number) * 16 + hexDigit(line[star + 2] as number) ? star : -1;
  };

  const fields = (line: Uint8Array, end: number): boolean => {
    let named = false;
    let column = 0;
    for (let at = skipSoft(line, 0, end); at < end; column++) {
      if (kinds[line[at] as number] === HARD) {
        at = skipSoft(line, at + 1, end);
        continue;
      }
      const colon = colonOf(line, at, end);
      if (colon === at || (column > 0 && named !== colon >= 0)) return false;
      named = colon >= 0;
      const input = named ? inputNamed(line, at, colon) : column < inputOfColumn.length ? inputOfColumn[column] : -1;
      const past = number(line, named ? skipSoft(line, colon + 1, end) : at, end, input as number);
      if (past < 0) return false;
      at = skipSoft(line, past, end);
      if (at < end && kinds[line[at] as number] === HARD) at = skipSoft(line, at + 1, end);
      else if (at < end && !(softSplits && at > past)) return false;
    }
    return column > 0;
  };

  return {
    counts,
    reset() {
      counts.fill(Number.NaN);
    },
    parse(line, length) {
      const end = checksum === null ? length : checked(line, length);
      if (end < 0) return 'checksum';
      fresh.fill(Number.NaN);
      if (!fields(line, end)) return 'syntax';
      let given = 0;
      for (let input = 0; input < inputs; input++) {
        const value = fresh[input] as number;
        if (!Number.isNaN(value)) given++;
        // A board that speaks on change leaves out what has not moved: its last value still stands.
        else if (options.sends === 'on_change') continue;
        counts[input] = value;
      }
      return given;
    },
  };
}

function byteKinds(separator: string | null): Uint8Array {
  const kinds = new Uint8Array(256);
  kinds[0x20] = kinds[0x09] = SOFT;
  if (separator === null) kinds[0x2c] = kinds[0x3b] = HARD;
  else if (separator !== ' ') kinds[separator.charCodeAt(0)] = HARD;
  return kinds;
}

function hexDigit(byte: number): number {
  const upper = byte >= 0x61 ? byte - 0x20 : byte;
  if (upper >= ZERO && upper <= 0x39) return upper - ZERO;
  return upper >= 0x41 && upper <= 0x46 ? upper - 0x41 + 10 : Number.NaN;
}
