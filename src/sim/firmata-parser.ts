import { ANALOG, DIGITAL, PIN_MODE, REPORT_ANALOG, SYSEX, SYSEX_END } from '../wire/firmata-messages.ts';

/** MAX_DATA_BYTES of FirmataConstants.h: longer ones are cut off. */
const SYSEX_BYTES_MAX = 64;

/** What a board does with each message from the bridge. */
export interface FirmataHeard {
  /** `second` has no meaning where a message has one data byte. */
  message(command: number, first: number, second: number): void;
  /** A message without data. */
  single(command: number): void;
  /** Feature byte and data, without the frame; valid until it returns. */
  sysex(body: Uint8Array): void;
}

/** Takes the bridge's bytes apart, in any portions, as a board's firmware does (protocol.md, Message Types). */
export function firmataParser(heard: FirmataHeard): (bytes: Uint8Array) => void {
  const body = new Uint8Array(SYSEX_BYTES_MAX);
  let command = 0;
  let length = 0;
  let wanted = 0;

  return (bytes) => {
    for (const byte of bytes) {
      if (command === SYSEX) {
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
        if (wanted === 0 && byte !== SYSEX) heard.single(byte);
      }
    }
  };
}

function dataBytes(command: number): number {
  if (command >= SYSEX) return command === PIN_MODE ? 2 : 0;
  const kind = command & 0xf0;
  if (kind === REPORT_ANALOG) return 1;
  return kind === ANALOG || kind === DIGITAL ? 2 : 0;
}
