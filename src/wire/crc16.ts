/**
 * CRC-16/IBM-3740 (also called CCITT-FALSE): polynomial 0x1021, start 0xFFFF, nothing reflected, nothing inverted.
 * Parameters and check value (0x29B1 of "123456789") as in the RevEng catalogue of parametrised CRC algorithms.
 */
const POLYNOMIAL = 0x1021;
const START = 0xffff;

const TABLE = Uint16Array.from({ length: 256 }, (_, high) => {
  let crc = high << 8;
  for (let bit = 0; bit < 8; bit++) crc = crc & 0x8000 ? (crc << 1) ^ POLYNOMIAL : crc << 1;
  return crc;
});

/** CRC of `bytes[from..to)`, 0 to 0xFFFF. */
export function crc16(bytes: Uint8Array, from: number, to: number): number {
  let crc = START;
  for (let at = from; at < to; at++) {
    crc = ((crc << 8) & 0xffff) ^ (TABLE[(crc >>> 8) ^ (bytes[at] as number)] as number);
  }
  return crc;
}
