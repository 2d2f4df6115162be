/** Flash of an ATmega328P: 32 KiB, addressed by the core as 16-bit words (ATmega328P datasheet, "In-System Reprogrammable Flash"). */
const FLASH_BYTES = 32_768;

/** Intel HEX record types (Intel, "Hexadecimal Object File Format Specification", rev. A; from memory). */
const DATA = 0;
const END = 1;

/** The flash image of an Intel HEX file with data and end records only. Throws on any other record or a wrong checksum. */
export function flashImage(hex: string): Uint16Array {
  const flash = new Uint8Array(FLASH_BYTES).fill(0xff);
  for (const line of hex.split(/\r?\n/)) {
    if (line === '') continue;
    const record = Buffer.from(line.slice(1), 'hex');
    const count = record[0] ?? 0;
    const sum = record.reduce((total, byte) => (total + byte) & 0xff, 0);
    if (line[0] !== ':' || record.length !== count + 5 || sum !== 0)
      throw new Error(`not an Intel HEX record: ${line}`);
    if (record[3] === END) break;
    if (record[3] !== DATA) throw new Error(`unexpected Intel HEX record type ${record[3]}`);
    flash.set(record.subarray(4, 4 + count), record.readUInt16BE(1));
  }
  return new Uint16Array(flash.buffer);
}
