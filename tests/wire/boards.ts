import type { WireChoice } from '../../src/wire/choice.ts';
import { encodeFromBoard } from '../../src/wire/frames-board.ts';
import { FRAME_BYTES_MAX, frameReader } from '../../src/wire/frames-layout.ts';
import { decodeFromHost } from '../../src/wire/frames-board.ts';
import type { BoardPlan, OutputWiring } from '../../src/wire/types.ts';

/** What a board of each wire says, so that one suite can drive them all. */
export interface TestBoard {
  /** What it says after a start. */
  start(): Uint8Array;
  /** What it answers to bytes from the host. */
  answer(sent: Uint8Array): Uint8Array;
  /** One reading, with counts for every input of `PLAN`. */
  reading(counts: readonly number[]): Uint8Array;
  /** The first reading of a text board is also its greeting. */
  readonly readyWithReading: boolean;
}

export interface WireFixture {
  readonly choice: WireChoice;
  readonly board: () => TestBoard;
}

export const WREN: OutputWiring = {
  follower: 'wren',
  joints: ['shoulder', 'elbow', 'twist'],
  servos: [
    { channel: 5, minUs: 560, maxUs: 2440, joint: 'shoulder' },
    { channel: 6, minUs: 600, maxUs: 2400, joint: 'elbow' },
    { channel: 17, minUs: 1000, maxUs: 2000, joint: 'twist' },
  ],
  power: { channel: 7, on: 'high' },
};

/** One board with both ends: three inputs and one follower of three servos. */
export const PLAN: BoardPlan = {
  boardName: null,
  inputs: { channels: [1, 0, 3], names: ['shoulder', 'elbow', 'pedal'], samplingMs: 10 },
  outputs: [WREN],
};

export const LINES: Extract<WireChoice, { name: 'lines' }> = {
  name: 'lines',
  lines: {
    separator: null,
    sends: 'always',
    checksum: null,
    template: '{shoulder.us},{elbow.us},{twist.us:2}\n',
    limp: 'X\n',
    powerOn: 'P1\n',
    powerOff: 'P0\n',
  },
};

export const FIXTURES: Record<WireChoice['name'], WireFixture> = {
  lines: { choice: LINES, board: linesBoard },
  frames: { choice: { name: 'frames' }, board: framesBoard },
  firmata: { choice: { name: 'firmata' }, board: firmataBoard },
};

export function ascii(text: string): Uint8Array {
  return new TextEncoder().encode(text);
}

export function hex(text: string): Uint8Array {
  return Uint8Array.from(Buffer.from(text.replaceAll(' ', ''), 'hex'));
}

export function join(...parts: readonly Uint8Array[]): Uint8Array {
  return Uint8Array.from(parts.flatMap((part) => [...part]));
}

function linesBoard(): TestBoard {
  return {
    start: () => ascii('\r\nboard: handstick\r\n'),
    answer: () => new Uint8Array(0),
    // Column 2 is nobody's.
    reading: ([shoulder, elbow, pedal]) => ascii(`${elbow},${shoulder},9,${pedal}\r\n`),
    readyWithReading: true,
  };
}

function framesBoard(): TestBoard {
  let sequence = 0;
  let timeUs = 0;
  const reader = frameReader();
  const out = new Uint8Array(FRAME_BYTES_MAX);
  const say = (message: Parameters<typeof encodeFromBoard>[0]): Uint8Array => {
    timeUs += 10_000;
    return out.slice(0, encodeFromBoard(message, sequence++ & 0xff, timeUs, out));
  };
  const hello = (started: boolean): Uint8Array =>
    say({ kind: 'hello', started, inputs: 8, outputs: 20, name: 'handstick' });
  return {
    start: () => hello(true),
    answer(sent) {
      let said = new Uint8Array(0);
      for (let at = 0; at < sent.length; ) {
        at = reader.read(sent, at);
        const heard = reader.found === 'frame' ? decodeFromHost(reader.payload, reader.length) : null;
        if (heard?.kind === 'hello') said = Uint8Array.from([...said, ...hello(false)]);
      }
      return said;
    },
    reading: ([shoulder, elbow, pedal]) =>
      say({
        kind: 'readings',
        firstChannel: 0,
        counts: [elbow as number, shoulder as number, Number.NaN, pedal as number],
      }),
    readyWithReading: false,
  };
}

/** An Uno's worth of Firmata: 20 pins, A0 to A5 on pins 14 to 19. */
function firmataBoard(): TestBoard {
  const version = [0xf9, 2, 5];
  const firmware = [0xf0, 0x79, 2, 5, ...[...ascii('handstick')].flatMap((letter) => [letter, 0]), 0xf7];
  const mapping = [0xf0, 0x6a, ...Array<number>(14).fill(0x7f), 0, 1, 2, 3, 4, 5, 0xf7];
  const analog = (channel: number, count: number): number[] => [0xe0 | channel, count & 0x7f, count >> 7];
  return {
    start: () => Uint8Array.from([...version, ...firmware]),
    answer(sent) {
      const asked = Buffer.from(sent).toString('hex');
      const said: number[] = [];
      if (asked.includes('f9')) said.push(...version);
      if (asked.includes('f079f7')) said.push(...firmware);
      if (asked.includes('f069f7')) said.push(...mapping);
      return Uint8Array.from(said);
    },
    reading: ([shoulder, elbow, pedal]) =>
      Uint8Array.from([...analog(0, elbow as number), ...analog(1, shoulder as number), ...analog(3, pedal as number)]),
    readyWithReading: false,
  };
}
