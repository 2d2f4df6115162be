/**
 * CRC-16/IBM-3740 (also called CCITT-FALSE): polynomial 0x1021, start 0xFFFF, nothing reflected, nothing inverted.
 * Parameters and check value (0x29B1 of "123456789") as in the RevEng catalogue of parametrised CRC algorithms.
 */
const POLYNOMIAL = 0x1021;
const START = 0xffff;

/** What a byte comes to, by itself and with one byte behind it: two bytes at a time take little longer than one. */
const LAST = Uint16Array.from({ length: 256 }, (_, byte) => shifted(byte << 8));
const LAST_BUT_ONE = LAST.map(shifted);

function shifted(crc: number): number {
  let left = crc;
  for (let bit = 0; bit < 8; bit++) left = left & 0x8000 ? (left << 1) ^ POLYNOMIAL : left << 1;
  return left & 0xffff;
}

/** CRC of `bytes[from..to)`, 0 to 0xFFFF. */
export function crc16(bytes: Uint8Array, from: number, to: number): number {
  let crc = START;
  let at = from;
  for (; at + 1 < to; at += 2) {
    crc =
      (LAST_BUT_ONE[(crc >>> 8) ^ (bytes[at] as number)] as number) ^
      (LAST[(crc & 0xff) ^ (bytes[at + 1] as number)] as number);
  }
  if (at < to) crc = ((crc << 8) & 0xffff) ^ (LAST[(crc >>> 8) ^ (bytes[at] as number)] as number);
  return crc;
}
