export const SYSEX_START = 0xf0;
export const SYSEX_END = 0xf7;
/** MAX_DATA_BYTES of FirmataConstants.h: longer ones are cut off. */
const SYSEX_BYTES_MAX = 64;

/** Messages from the bridge, taken apart (protocol.md, Message Types). */
export interface Heard {
  message(command: number, first: number, second: number): void;
  single(command: number): void;
  /** Command byte and data, without the frame. */
  sysex(body: Uint8Array): void;
}

export function firmataParser(heard: Heard): (bytes: Uint8Array) => void {
  const body = new Uint8Array(SYSEX_BYTES_MAX);
  let command = 0;
  let length = 0;
  let wanted = 0;

  return (bytes) => {
    for (const byte of bytes) {
      if (command === SYSEX_START) {
        if (byte === SYSEX_END) {
          command = 0;
          heard.sysex(body.subarray(0, length));
        } else if (length < SYSEX_BYTES_MAX) body[length++] = byte;
      } else if (byte < 0x80) {
        if (length >= wanted) continue;
        body[length++] = byte;
        if (length === wanted) heard.message(command, body[0] as number, body[1] as number);
      } else {
        command = byte;
        length = 0;
        wanted = dataBytes(byte);
        if (wanted === 0 && byte !== SYSEX_START) heard.single(byte);
      }
    }
  };
}

/** How many data bytes follow a command (protocol.md, Message Types). */
function dataBytes(command: number): number {
  if (command >= SYSEX_START) return command === 0xf4 || command === 0xf5 ? 2 : 0;
  const kind = command & 0xf0;
  if (kind === 0xc0 || kind === 0xd0) return 1;
  return kind === 0xe0 || kind === 0x90 ? 2 : 0;
}
