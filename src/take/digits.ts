const ZERO = 0x30;
const MINUS = 0x2d;
const POINT = 0x2e;

/** Decimals of a number in a table: a millionth of a degree is far below any servo. */
const DECIMALS = 1e6;
/** Past this, whole numbers are written in two parts: below it they are 32-bit integers, which divide fast. */
const PART = 1e8;
const PART_DIGITS = 8;
/** Past this a number in millionths would be no exact integer. */
const FIXED_MAX = Number.MAX_SAFE_INTEGER / DECIMALS;

/** The two digits of 0 to 99. */
const PAIRS = Uint8Array.from({ length: 200 }, (_, i) => ZERO + (i % 2 === 0 ? Math.floor(i / 20) : (i >> 1) % 10));

const encoder = new TextEncoder();

/** Room that `putNumber` needs, bytes. */
export const NUMBER_BYTES_MAX = 32;

/**
 * Writes a number with up to six decimals at `at`, none where it is whole; one too large for that as JavaScript does.
 * @returns where its digits end
 */
export function putNumber(value: number, into: Uint8Array, at: number): number {
  const size = Math.abs(value);
  if (!(size < FIXED_MAX)) return putLarge(value, into, at);
  const fixed = Math.round(size * DECIMALS);
  const whole = Math.floor(fixed / DECIMALS);
  const rest = fixed - whole * DECIMALS;
  let end = at;
  if (value < 0 && fixed > 0) into[end++] = MINUS;
  end = putWhole(whole, into, end);
  if (rest === 0) return end;
  into[end] = POINT;
  end += 7;
  putPadded(rest | 0, into, end, 6);
  while (into[end - 1] === ZERO) end--;
  return end;
}

function putLarge(value: number, into: Uint8Array, at: number): number {
  return Number.isInteger(value) && Math.abs(value) <= Number.MAX_SAFE_INTEGER
    ? putWhole(value, into, at)
    : at + encoder.encodeInto(`${value}`, into.subarray(at)).written;
}

/** @param value an integer that a double holds exactly */
function putWhole(value: number, into: Uint8Array, at: number): number {
  if (value < 0) {
    into[at] = MINUS;
    return putWhole(-value, into, at + 1);
  }
  if (value >= PART) {
    const high = Math.floor(value / PART);
    const end = putWhole(high, into, at) + PART_DIGITS;
    putPadded((value - high * PART) | 0, into, end, PART_DIGITS);
    return end;
  }
  const digits = value < 1e4 ? (value < 100 ? (value < 10 ? 1 : 2) : value < 1e3 ? 3 : 4) : digitsOf(value);
  putPadded(value | 0, into, at + digits, digits);
  return at + digits;
}

function digitsOf(value: number): number {
  return value < 1e6 ? (value < 1e5 ? 5 : 6) : value < 1e7 ? 7 : 8;
}

/** The last `digits` digits of a 32-bit integer, ending before `end`. */
function putPadded(value: number, into: Uint8Array, end: number, digits: number): void {
  let rest = value;
  let at = end;
  for (let left = digits; left > 1; left -= 2) {
    const more = (rest / 100) | 0;
    const pair = 2 * (rest - 100 * more);
    at -= 2;
    into[at] = PAIRS[pair] as number;
    into[at + 1] = PAIRS[pair + 1] as number;
    rest = more;
  }
  if (digits % 2 === 1) into[at - 1] = ZERO + rest;
}
