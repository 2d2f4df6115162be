/**
 * Consistent overhead byte stuffing: writes any bytes without a zero, so that a zero can end a frame.
 * Cheshire & Baker, IEEE/ACM Transactions on Networking 7(2), 1999.
 */

/** A block holds at most this many bytes; its code byte then says 0xFF and no zero follows. */
const BLOCK_MAX = 254;

/** Longest form of `length` bytes, without the zero that ends a frame. */
export function cobsBytesMax(length: number): number {
  return length + 1 + Math.floor(length / BLOCK_MAX);
}

/** Writes `bytes[0..length)` into `out` from `at`, without a closing zero; returns where it ended. */
export function cobsEncode(bytes: Uint8Array, length: number, out: Uint8Array, at: number): number {
  let codeAt = at;
  let end = at + 1;
  for (let read = 0; read < length; read++) {
    // A full block is closed only when another byte follows: 254 bytes then cost one byte, not two.
    if (end - codeAt > BLOCK_MAX) {
      out[codeAt] = BLOCK_MAX + 1;
      codeAt = end++;
    }
    const byte = bytes[read] as number;
    if (byte === 0) {
      out[codeAt] = end - codeAt;
      codeAt = end++;
    } else {
      out[end++] = byte;
    }
  }
  out[codeAt] = end - codeAt;
  return end;
}

/**
 * Undoes `cobsEncode` for `bytes[0..length)`, into `out` (which may be `bytes` itself); returns the length, or -1 when
 * the bytes are no whole stuffed frame.
 */
export function cobsDecode(bytes: Uint8Array, length: number, out: Uint8Array): number {
  if (length === 0) return -1;
  let end = 0;
  let read = 0;
  while (read < length) {
    const code = bytes[read++] as number;
    const blockEnd = read + code - 1;
    if (code === 0 || blockEnd > length) return -1;
    while (read < blockEnd) {
      const byte = bytes[read++] as number;
      if (byte === 0) return -1;
      out[end++] = byte;
    }
    if (code <= BLOCK_MAX && read < length) out[end++] = 0;
  }
  return end;
}
