import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { decodeFromHost, encodeFromBoard, type FromBoard, type FromHost } from '../../src/wire/frames-board.ts';
import { FRAME_BYTES_MAX, frameReader, READINGS_MAX, SERVOS_MAX, seal } from '../../src/wire/frames-layout.ts';
import { openSession } from '../../src/wire/session.ts';
import type { BoardPlan, WireEvent, WireSession } from '../../src/wire/types.ts';
import { hex } from './boards.ts';
import { frameOf, kinds, pushed, readings, told, written } from './told.ts';

/**
 * Frames byte by byte, as README.md lays them out. CRCs were computed with Python's `binascii.crc_hqx(bytes, 0xffff)`,
 * the stuffing by hand.
 */
const WREN: BoardPlan = {
  boardName: null,
  inputs: { channels: [1, 4, 3, 2], names: ['base', 'shoulder', 'elbow', 'twist'], samplingMs: 10 },
  outputs: [
    {
      follower: 'wren',
      joints: ['shoulder', 'elbow', 'twist'],
      servos: [
        { channel: 5, minUs: 1, maxUs: 8_191.875, joint: 'shoulder' },
        { channel: 6, minUs: 0, maxUs: 8_191.875, joint: 'elbow' },
        { channel: 7, minUs: 1, maxUs: 8_191.875, joint: 'twist' },
      ],
      power: { channel: 7, on: 'high' },
    },
  ],
};

interface BoardVector {
  readonly what: string;
  readonly bytes: string;
  readonly sequence: number;
  readonly timeUs: number;
  readonly message: FromBoard;
  readonly event: WireEvent;
}

const FROM_BOARD: readonly BoardVector[] = [
  {
    what: 'hello of a board that has just started',
    bytes: '02 01 03 e8 03 01 0b 01 01 06 0c 77 72 65 6e e7 8d 00',
    sequence: 0,
    timeUs: 1_000,
    message: { kind: 'hello', started: true, inputs: 6, outputs: 12, name: 'wren' },
    event: { kind: 'ready', board: 'wren', kept: false },
  },
  {
    what: 'readings from channel 1 on, one of them without a value',
    bytes: '05 02 01 08 52 01 02 01 02 02 01 07 ff ff ff 03 47 a3 00',
    sequence: 1,
    timeUs: 21_000,
    message: { kind: 'readings', firstChannel: 1, counts: [512, 0, Number.NaN, 1023] },
    event: { kind: 'reading', counts: Float64Array.of(512, 1023, Number.NaN, 0), boardUs: 21_000 },
  },
  {
    what: 'answer to an echo',
    bytes: '06 03 02 40 42 0f 02 07 03 2a eb 00',
    sequence: 2,
    timeUs: 1_000_000,
    message: { kind: 'echo', id: 7 },
    event: { kind: 'echo', id: 7, boardUs: 1_000_000 },
  },
];

const OTHER_HELLO = {
  bytes: '03 01 05 01 01 03 80 01 01 08 03 77 72 65 6e f1 58 00',
  message: { kind: 'hello', started: false, inputs: 0, outputs: 3, name: 'wren' },
} as const;

interface HostVector {
  readonly what: string;
  readonly bytes: string;
  readonly write: (session: WireSession) => number[];
  readonly message: FromHost;
}

/** In the order one session sends them: the sequence numbers run on. */
const FROM_HOST: readonly HostVector[] = [
  {
    what: 'request for a hello, after a zero that ends former noise',
    bytes: '00 02 41 03 f2 23 00',
    write: (session) =>
      told((emit) => session.open(emit)).flatMap((event) => (event.kind === 'send' ? [...event.bytes] : [])),
    message: { kind: 'hello' },
  },
  {
    what: 'command: 1500 us, the shortest and the longest pulse',
    bytes: '07 42 01 05 e0 2e 06 01 06 07 ff ff d9 11 00',
    write: (session) => written(session, 0, (out) => session.encode(0, frameOf([1_500, 0, 8_191.875]), out)),
    message: { kind: 'command', channels: [5, 6, 7], pulsesUs: [1_500, 0, 8_191.875] },
  },
  {
    what: 'power on',
    bytes: '07 44 02 07 01 7b c7 00',
    write: (session) => written(session, 0, (out) => session.power(0, true, out)),
    message: { kind: 'power', channel: 7, high: true },
  },
  {
    what: 'power off',
    bytes: '04 44 03 07 03 6a e0 00',
    write: (session) => written(session, 0, (out) => session.power(0, false, out)),
    message: { kind: 'power', channel: 7, high: false },
  },
  {
    what: 'request for an echo',
    bytes: '04 45 04 7f 03 be 92 00',
    write: (session) => written(session, 0, (out) => session.echo(0x7f, out)),
    message: { kind: 'echo', id: 0x7f },
  },
];

function said(message: FromBoard, sequence: number, timeUs: number): Uint8Array {
  const out = new Uint8Array(FRAME_BYTES_MAX);
  return out.slice(0, encodeFromBoard(message, sequence, timeUs, out));
}

const hello = (started: boolean, sequence = 0, timeUs = 0): Uint8Array =>
  said({ kind: 'hello', started, inputs: 6, outputs: 12, name: 'wren' }, sequence, timeUs);
const row = (count: number, sequence: number, timeUs: number): Uint8Array =>
  said({ kind: 'readings', firstChannel: 1, counts: [count, count, count, count] }, sequence, timeUs);
const echo = (id: number, sequence: number, timeUs: number): Uint8Array => said({ kind: 'echo', id }, sequence, timeUs);

function greeted(): WireSession {
  const session = openSession({ name: 'frames' }, WREN);
  session.open(() => {});
  pushed(session, hello(true));
  return session;
}

describe('a frame from the board', () => {
  const followedBy = hex('02 41 03');
  for (const { what, bytes, message, sequence, timeUs, event } of FROM_BOARD) {
    it(`is written byte by byte: ${what}`, () => {
      expect(said(message, sequence, timeUs)).toEqual(hex(bytes));
    });

    it(`is read whole, byte by byte and with the next one's beginning behind it: ${what}`, () => {
      for (const [wire, chunk] of [
        [hex(bytes), 1_000],
        [hex(bytes), 1],
        [Uint8Array.from([...hex(bytes), ...followedBy]), 1_000],
      ] as const) {
        const session = openSession({ name: 'frames' }, WREN);
        session.open(() => {});
        if (message.kind !== 'hello') pushed(session, said(FROM_BOARD[0]!.message, sequence - 1, 0));
        expect(pushed(session, wire, chunk)).toEqual([event]);
      }
    });
  }

  it('is written for a hello that was asked for', () => {
    expect(said(OTHER_HELLO.message, 5, 2 ** 31)).toEqual(hex(OTHER_HELLO.bytes));
  });
});

describe('a frame to the board', () => {
  it('is written byte by byte, and read by the board as it was meant', () => {
    const session = openSession({ name: 'frames' }, WREN);
    for (const { what, bytes, write, message } of FROM_HOST) {
      const wire = write(session);
      expect({ what, wire }).toEqual({ what, wire: [...hex(bytes)] });
      for (const chunk of [1_000, 1]) {
        const reader = frameReader();
        const heard: (FromHost | null)[] = [];
        for (let from = 0; from < wire.length; from += chunk) {
          const part = Uint8Array.from(wire.slice(from, from + chunk));
          for (let at = 0; at < part.length; ) {
            at = reader.read(part, at);
            if (reader.found === 'frame') heard.push(decodeFromHost(reader.payload, reader.length));
          }
        }
        expect({ what, heard }).toEqual({ what, heard: [message] });
      }
    }
  });

  it('ends the pulses of all servos of the follower', () => {
    const session = openSession({ name: 'frames' }, WREN);
    const wire = Uint8Array.from(written(session, 0, (out) => session.limp(0, out)));
    const reader = frameReader();
    reader.read(wire, 0);
    expect(decodeFromHost(reader.payload, reader.length)).toEqual({ kind: 'limp', channels: [5, 6, 7] });
  });

  it('holds only the servos that have pulses while the arm wakes', () => {
    const session = openSession({ name: 'frames' }, WREN);
    const wire = Uint8Array.from(
      written(session, 0, (out) => session.encode(0, frameOf([1_500, 900, 2_100], [], 2), out)),
    );
    const reader = frameReader();
    reader.read(wire, 0);
    expect(decodeFromHost(reader.payload, reader.length)).toEqual({
      kind: 'command',
      channels: [5, 6],
      pulsesUs: [1_500, 900],
    });
  });

  it('switches a low-active output the other way round', () => {
    const output = { ...WREN.outputs[0]!, power: { channel: 9, on: 'low' } as const };
    const session = openSession({ name: 'frames' }, { ...WREN, outputs: [output] });
    const reader = frameReader();
    reader.read(Uint8Array.from(written(session, 0, (out) => session.power(0, true, out))), 0);
    expect(decodeFromHost(reader.payload, reader.length)).toEqual({ kind: 'power', channel: 9, high: false });
  });

  it('is refused for more servos than one frame holds', () => {
    const servos = Array.from({ length: SERVOS_MAX + 1 }, (_, channel) => ({
      channel,
      minUs: 1,
      maxUs: 2,
      joint: 'a',
    }));
    const output = { ...WREN.outputs[0]!, servos };
    expect(() => openSession({ name: 'frames' }, { ...WREN, outputs: [output] })).toThrow(RangeError);
  });

  it('holds as many servos as are announced, in one frame', () => {
    const servos = Array.from({ length: SERVOS_MAX }, (_, channel) => ({ channel, minUs: 1, maxUs: 9, joint: 'a' }));
    const session = openSession({ name: 'frames' }, { ...WREN, outputs: [{ ...WREN.outputs[0]!, servos }] });
    const wire = written(session, 0, (out) => session.encode(0, frameOf(servos.map(() => 5)), out));
    expect(wire.length).toBe(session.frameBytesMax(0));
    expect(wire.length).toBeLessThanOrEqual(FRAME_BYTES_MAX);
    expect(wire.indexOf(0)).toBe(wire.length - 1);
  });
});

describe('the frames that README.md shows', () => {
  it('are the ones this suite writes and reads', () => {
    const text = readFileSync(new URL('../../src/wire/README.md', import.meta.url), 'utf8');
    const shown = [...text.matchAll(/ ((?:[0-9a-f]{2} ){4,}00)$/gm)].map((match) => match[1] as string);
    const known = [...FROM_BOARD, ...FROM_HOST].map(({ bytes }) => bytes.replace(/^00 /, ''));
    expect(shown).toHaveLength(5);
    expect(known).toEqual(expect.arrayContaining(shown));
  });
});

describe('a frames session', () => {
  it('drops what the board said before its hello', () => {
    const session = openSession({ name: 'frames' }, WREN);
    session.open(() => {});
    expect(pushed(session, Uint8Array.from([...row(5, 4, 9), 3, 2, 1, 0]))).toEqual([]);
    expect(kinds(pushed(session, hello(false)))).toEqual(['ready']);
  });

  it('counts the frames that never came', () => {
    const session = greeted();
    expect(pushed(session, row(1, 1, 10)).length).toBe(1);
    expect(pushed(session, row(2, 5, 50))[0]).toEqual({ kind: 'lost', frames: 3 });
    expect(kinds(pushed(session, row(3, 6, 60)))).toEqual(['reading']);
  });

  it('counts past the wrap of the sequence number', () => {
    const session = greeted();
    for (let sequence = 1; sequence < 600; sequence++) {
      expect(kinds(pushed(session, row(1, sequence & 0xff, sequence * 10)))).toEqual(['reading']);
    }
  });

  it('tells a damaged frame, and then that it is missing', () => {
    const session = greeted();
    const damaged = row(1, 1, 10);
    damaged[2] = (damaged[2] as number) ^ 0x10;
    expect(pushed(session, damaged)).toEqual([{ kind: 'garbled', bytes: damaged.length, why: 'checksum' }]);
    expect(kinds(pushed(session, row(1, 2, 20)))).toEqual(['lost', 'reading']);
  });

  it('tells a frame whose end was cut off', () => {
    const session = greeted();
    // The last block of a reading says seven bytes and has two.
    const cut = hex('05 02 01 08 52 01 02 01 02 02 01 07 ff ff 00');
    expect(pushed(session, cut)).toEqual([{ kind: 'garbled', bytes: 15, why: 'cut' }]);
  });

  it('tells an endless frame, up to its end, and reads the next', () => {
    const session = greeted();
    const events = pushed(session, Uint8Array.from([...new Uint8Array(300).fill(7), 0, ...row(1, 1, 10)]));
    expect(events.slice(0, 2)).toEqual([
      { kind: 'garbled', bytes: FRAME_BYTES_MAX - 1, why: 'oversize' },
      { kind: 'garbled', bytes: 301 - (FRAME_BYTES_MAX - 1), why: 'oversize' },
    ]);
    expect(kinds(events.slice(2))).toEqual(['reading']);
  });

  it('tells a frame of the wrong length', () => {
    const session = greeted();
    const out = new Uint8Array(FRAME_BYTES_MAX);
    const odd = new Uint8Array(250);
    odd.set([0x02, 1, 10, 0, 0, 0, 1, 5]);
    expect(pushed(session, out.slice(0, seal(odd, 8, out, 0)))).toEqual([{ kind: 'garbled', bytes: 8, why: 'count' }]);
  });

  it('tells a frame of a type it does not know', () => {
    const session = greeted();
    const out = new Uint8Array(FRAME_BYTES_MAX);
    const strange = new Uint8Array(250);
    strange.set([0x20, 1, 10, 0, 0, 0]);
    expect(kinds(pushed(session, out.slice(0, seal(strange, 6, out, 0))))).toEqual(['garbled']);
  });

  it('is not ready with a board that speaks another version', () => {
    const session = openSession({ name: 'frames' }, WREN);
    session.open(() => {});
    const out = new Uint8Array(FRAME_BYTES_MAX);
    const later = new Uint8Array(250);
    later.set([0x01, 0, 0, 0, 0, 0, 2, 1, 6, 12, 0x77]);
    expect(pushed(session, out.slice(0, seal(later, 11, out, 0)))).toEqual([]);
  });

  it('lets board time go on past the wrap of its counter', () => {
    const session = openSession({ name: 'frames' }, WREN);
    session.open(() => {});
    const near = 2 ** 32 - 5_000;
    pushed(session, hello(false, 0, near));
    const events = pushed(
      session,
      Uint8Array.from([...row(1, 1, near + 2_000), ...row(1, 2, 3_000), ...row(1, 3, 13_000)]),
    );
    expect(events.map((event) => (event.kind === 'reading' ? event.boardUs - near : event))).toEqual([
      2_000, 8_000, 18_000,
    ]);
  });

  it('notices by its time that a board has started again, though its hello was lost, and asks for it', () => {
    const session = greeted();
    pushed(session, row(1, 1, 90_000_000));
    const events = pushed(session, row(1, 0, 20_000));
    expect(kinds(events)).toEqual(['reboot', 'send']);
    expect(kinds(pushed(session, hello(false, 1, 30_000)))).toEqual(['ready']);
  });

  it('takes a second hello that it asked for as no restart', () => {
    const session = greeted();
    expect(pushed(session, hello(false, 1, 10))).toEqual([]);
    expect(kinds(pushed(session, row(1, 2, 20)))).toEqual(['reading']);
  });

  it('sees a restart in an answer whose time lies far back', () => {
    const session = greeted();
    pushed(session, row(1, 1, 90_000_000));
    expect(kinds(pushed(session, hello(false, 0, 20_000)))).toEqual(['reboot', 'ready']);
  });

  it('knows that the servos of a board that kept running still have their pulses', () => {
    const session = greeted();
    session.open(() => {});
    const running = { kind: 'hello', inputs: 6, outputs: 12, name: 'wren' } as const;
    expect(pushed(session, said({ ...running, started: false, pulsing: true }, 9, 10_000))).toEqual([
      { kind: 'ready', board: 'wren', kept: true },
    ]);
    session.open(() => {});
    // Asked, but it has started since: no servo has pulses.
    expect(pushed(session, said({ ...running, started: false, pulsing: false }, 9, 10_000))).toEqual([
      { kind: 'ready', board: 'wren', kept: false },
    ]);
  });

  it('drops a reading that was overtaken by a later one', () => {
    const session = greeted();
    pushed(session, row(1, 1, 500_000));
    expect(readings(pushed(session, row(2, 0, 490_000)))).toEqual([]);
    expect(kinds(pushed(session, row(3, 2, 510_000)))).toEqual(['reading']);
  });

  it('believes a board that only echoes, however long it was silent', () => {
    const session = greeted();
    pushed(session, echo(1, 1, 3_000_000_000));
    // 40 minutes later, past the wrap: 3e9 + 2.4e9 - 2^32.
    const events = pushed(session, echo(2, 2, 3_000_000_000 + 2_400_000_000 - 2 ** 32));
    expect(events).toEqual([{ kind: 'echo', id: 2, boardUs: 5_400_000_000 }]);
  });

  it('makes no reading of channels that nobody asked for', () => {
    const session = greeted();
    expect(pushed(session, said({ kind: 'readings', firstChannel: 20, counts: [1, 2] }, 1, 10))).toEqual([]);
  });

  it('leaves out what a frame does not reach', () => {
    const session = greeted();
    const events = pushed(session, said({ kind: 'readings', firstChannel: 3, counts: [30, 40] }, 1, 10));
    expect(readings(events)).toEqual([[Number.NaN, 40, 30, Number.NaN]]);
  });

  it('says which of the wired channels the board does not have', () => {
    const session = openSession({ name: 'frames' }, WREN);
    session.open(() => {});
    const events = pushed(session, said({ kind: 'hello', started: true, inputs: 4, outputs: 7, name: 'wren' }, 0, 0));
    expect(events).toEqual([
      { kind: 'lacks', what: 'input', channel: 4 },
      { kind: 'lacks', what: 'output', channel: 7 },
      { kind: 'lacks', what: 'output', channel: 7 },
      { kind: 'ready', board: 'wren', kept: false },
    ]);
  });

  it('shows no control characters of a board name', () => {
    const session = openSession({ name: 'frames' }, WREN);
    session.open(() => {});
    const events = pushed(
      session,
      said({ kind: 'hello', started: true, inputs: 6, outputs: 12, name: '\u001b[2Jwren' }, 0, 0),
    );
    expect(events).toEqual([{ kind: 'ready', board: '?[2Jwren', kept: false }]);
  });

  it('reads as many channels as are announced from one frame', () => {
    const session = openSession(
      { name: 'frames' },
      { ...WREN, inputs: { channels: [READINGS_MAX - 1], names: ['last'], samplingMs: 10 } },
    );
    session.open(() => {});
    pushed(session, said({ kind: 'hello', started: true, inputs: READINGS_MAX, outputs: 12, name: 'wren' }, 0, 0));
    const counts = Array.from({ length: READINGS_MAX }, (_, channel) => channel);
    const frame = said({ kind: 'readings', firstChannel: 0, counts }, 1, 10);
    expect(frame.length).toBeLessThanOrEqual(FRAME_BYTES_MAX);
    expect(readings(pushed(session, frame))).toEqual([[READINGS_MAX - 1]]);
  });
});
