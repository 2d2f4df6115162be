import { readSync } from 'node:fs';
import type { ReadAt } from './framing.ts';

/** Reads a file in pieces of at least `leastBytes`, so that neighbours cost one call to the system. */
export function fileWindow(descriptor: number, leastBytes: number): ReadAt {
  let buffer = new Uint8Array(leastBytes);
  let from = 0;
  let got = 0;
  return (offset, bytes) => {
    const at = offset - from;
    if (at >= 0 && at + bytes <= got) return buffer.subarray(at, at + bytes);
    if (buffer.length < bytes) buffer = new Uint8Array(bytes);
    from = offset;
    got = 0;
    while (got < bytes) {
      const more = readSync(descriptor, buffer, got, buffer.length - got, offset + got);
      if (more === 0) break;
      got += more;
    }
    return buffer.subarray(0, Math.min(bytes, got));
  };
}
