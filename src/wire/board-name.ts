/** Longest board name that is kept, in bytes as received. */
const BOARD_NAME_BYTES_MAX = 64;

const text = new TextDecoder();

/** A name as a board says it. It is shown on terminals, so control characters become question marks. */
export function boardName(bytes: Uint8Array, from: number, to: number): string {
  const end = Math.min(to, from + BOARD_NAME_BYTES_MAX);
  return text.decode(bytes.subarray(from, end)).replace(/\p{C}/gu, '?').trim();
}
