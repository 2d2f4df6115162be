import { describe, expect, it } from 'vitest';
import { openSession } from '../../src/wire/session.ts';
import { SYSEX_BYTES_MAX } from '../../src/wire/firmata-reader.ts';
import type { BoardPlan, OutputWiring, WireEvent, WireSession } from '../../src/wire/types.ts';
import { ascii, hex, PLAN, WREN } from './boards.ts';
import { frameOf, kinds, pushed, readings, told, written } from './told.ts';

/** What an Uno says, after protocol.md of firmata/protocol: version 2.5, firmware "Std" 2.5, its analog mapping. */
const VERSION = [0xf9, 2, 5];
const FIRMWARE = [0xf0, 0x79, 2, 5, 0x53, 0, 0x74, 0, 0x64, 0, 0xf7];
const MAPPING = [0xf0, 0x6a, ...Array<number>(14).fill(0x7f), 0, 1, 2, 3, 4, 5, 0xf7];
const ASK_MAPPING = [0xf0, 0x69, 0xf7];
const ASK_BOTH = [0xf9, 0xf0, 0x79, 0xf7];
const FOLLOWERS: BoardPlan = { boardName: null, inputs: null, outputs: [WREN] };

function opened(plan: BoardPlan = PLAN): WireSession {
  const session = openSession({ name: 'firmata' }, plan);
  session.open(() => {});
  return session;
}

function greeted(plan: BoardPlan = PLAN): WireSession {
  const session = opened(plan);
  pushed(session, [...VERSION, ...FIRMWARE]);
  pushed(session, MAPPING);
  return session;
}

const sent = (events: readonly WireEvent[]): number[][] =>
  events.flatMap((event) => (event.kind === 'send' ? [[...event.bytes]] : []));
const analog = (channel: number, count: number): number[] => [0xe0 | channel, count & 0x7f, count >> 7];
const nudged = (session: WireSession): WireEvent[] => told((emit) => session.nudge(emit));

describe('the greeting of a Firmata board', () => {
  it('is waited for in silence, because a boot loader would hear whatever is said', () => {
    const session = openSession({ name: 'firmata' }, PLAN);
    expect(told((emit) => session.open(emit))).toEqual([]);
  });

  it('leads to the mapping, then to the configuration, then to ready', () => {
    const session = opened();
    expect(pushed(session, VERSION)).toEqual([]);
    expect(sent(pushed(session, FIRMWARE))).toEqual([ASK_MAPPING]);
    const events = pushed(session, MAPPING);
    expect(sent(events)).toEqual([
      [
        ...hex('f0 7a 0a 00 f7'),
        // Channels 0, 1 and 3 are pins 14, 15 and 17; mode 2 is analog.
        ...hex('f4 0e 02  f4 0f 02  f4 11 02'),
        ...hex('c0 01  c1 01  c3 01'),
      ],
    ]);
    expect(events.at(-1)).toEqual({ kind: 'ready', board: 'Std' });
  });

  it('asks for nothing but the mapping where no leader hangs on the board', () => {
    const session = opened(FOLLOWERS);
    expect(sent(pushed(session, [...VERSION, ...FIRMWARE]))).toEqual([ASK_MAPPING]);
    expect(pushed(session, MAPPING)).toEqual([{ kind: 'ready', board: 'Std' }]);
  });

  it('is asked for at each nudge until it comes', () => {
    const session = opened();
    expect(sent(nudged(session))).toEqual([ASK_BOTH]);
    expect(sent(nudged(session))).toEqual([ASK_BOTH]);
    expect(sent(pushed(session, [...VERSION, ...FIRMWARE, ...VERSION, ...FIRMWARE]))).toEqual([ASK_MAPPING]);
    expect(kinds(pushed(session, MAPPING))).toContain('ready');
    expect(nudged(session)).toEqual([]);
  });

  it('does without a firmware name once it has been asked for', () => {
    const session = opened(FOLLOWERS);
    pushed(session, VERSION);
    expect(sent(nudged(session))).toEqual([ASK_BOTH]);
    pushed(session, VERSION);
    expect(sent(nudged(session))).toEqual([ASK_MAPPING]);
    expect(pushed(session, MAPPING)).toEqual([{ kind: 'ready', board: null }]);
  });

  it('does without a mapping for followers, and asks a leader for it again', () => {
    const follower = opened(FOLLOWERS);
    pushed(follower, [...VERSION, ...FIRMWARE]);
    expect(nudged(follower)).toEqual([{ kind: 'ready', board: 'Std' }]);
    const leader = opened();
    pushed(leader, [...VERSION, ...FIRMWARE]);
    expect(sent(nudged(leader))).toEqual([ASK_MAPPING]);
  });

  it('takes the extension off the name, as protocol.md has it', () => {
    const name = [...ascii('StandardFirmata.ino')].flatMap((letter) => [letter, 0]);
    for (const boardName of ['StandardFirmata', 'StandardFirmata.ino']) {
      const session = opened({ ...FOLLOWERS, boardName });
      pushed(session, [...VERSION, 0xf0, 0x79, 2, 5, ...name, 0xf7]);
      expect(pushed(session, MAPPING)).toEqual([{ kind: 'ready', board: 'StandardFirmata' }]);
    }
  });

  it('says which wired channels the board does not have', () => {
    const session = opened({
      boardName: null,
      inputs: { channels: [1, 7], names: ['shoulder', 'elbow'], samplingMs: 19 },
      outputs: [{ ...WREN, servos: [{ channel: 20, minUs: 600, maxUs: 2_400, joint: 'shoulder' }] }],
    });
    pushed(session, [...VERSION, ...FIRMWARE]);
    const events = pushed(session, MAPPING);
    expect(events.filter(({ kind }) => kind === 'lacks')).toEqual([
      { kind: 'lacks', what: 'input', channel: 7 },
      { kind: 'lacks', what: 'output', channel: 20 },
    ]);
    expect(readings(pushed(session, analog(1, 5)))).toEqual([[5, Number.NaN]]);
  });
});

describe('a round of analog messages', () => {
  it('is one reading, complete when its last channel arrives', () => {
    const session = greeted();
    expect(pushed(session, [...analog(0, 300), ...analog(1, 512)])).toEqual([]);
    expect(readings(pushed(session, analog(3, 9)))).toEqual([[512, 300, 9]]);
  });

  it('passes over channels that nobody asked for', () => {
    const session = greeted();
    expect(
      readings(
        pushed(
          session,
          [0, 1, 2, 3, 4, 5].flatMap((channel) => analog(channel, channel)),
        ),
      ),
    ).toEqual([[1, 0, 3]]);
  });

  it('has no value where a message was lost, and costs no other round', () => {
    const session = greeted();
    const first = [...analog(0, 1), ...analog(1, 2), ...analog(3, 3)];
    const noSecond = [...analog(0, 4), ...analog(3, 6)];
    const noLast = [...analog(0, 7), ...analog(1, 8)];
    expect(readings(pushed(session, [...first, ...noSecond, ...noLast, ...first]))).toEqual([
      [2, 1, 3],
      [Number.NaN, 4, 6],
      [8, 7, Number.NaN],
      [2, 1, 3],
    ]);
  });

  it('is dropped while the board is still being configured and has not reported all', () => {
    const session = greeted();
    const events = pushed(session, [
      ...analog(1, 8),
      ...analog(0, 1),
      ...analog(1, 2),
      ...analog(0, 1),
      ...analog(1, 2),
    ]);
    expect(readings(events)).toEqual([]);
    expect(readings(pushed(session, analog(3, 3)))).toEqual([[2, 1, 3]]);
  });

  it('is dropped too when a middle channel is missing, until a first one was whole', () => {
    const session = greeted();
    expect(readings(pushed(session, [...analog(0, 1), ...analog(3, 3)]))).toEqual([]);
    expect(readings(pushed(session, [...analog(0, 1), ...analog(1, 2), ...analog(3, 3)]))).toEqual([[2, 1, 3]]);
  });

  it('goes by the mapping of the board that is there now', () => {
    const session = greeted();
    const fewer = [0xf0, 0x6a, ...Array<number>(14).fill(0x7f), 0, 1, 0xf7];
    pushed(session, [...VERSION, ...FIRMWARE]);
    expect(pushed(session, fewer)).toContainEqual({ kind: 'lacks', what: 'input', channel: 3 });
    expect(readings(pushed(session, [...analog(3, 3), ...analog(0, 1), ...analog(1, 2)]))).toEqual([
      [2, 1, Number.NaN],
    ]);
  });

  it('follows the order of the pins, which need not be that of the channels', () => {
    const session = opened({ ...PLAN, inputs: { channels: [0, 6], names: ['a', 'b'], samplingMs: 19 }, outputs: [] });
    pushed(session, [...VERSION, ...FIRMWARE]);
    // A Leonardo's kind: channel 6 on pin 4, channel 0 on pin 18.
    const leonardo = Array<number>(24).fill(0x7f);
    leonardo[4] = 6;
    leonardo[18] = 0;
    pushed(session, [0xf0, 0x6a, ...leonardo, 0xf7]);
    expect(readings(pushed(session, [...analog(6, 60), ...analog(0, 10)]))).toEqual([[10, 60]]);
  });

  it('may come as extended analog messages', () => {
    const session = greeted();
    expect(readings(pushed(session, [...analog(0, 1), ...analog(1, 2), 0xf0, 0x6f, 3, 0x7f, 0x07, 0xf7]))).toEqual([
      [2, 1, 1023],
    ]);
  });

  it('is nothing before ready', () => {
    const session = opened();
    pushed(session, [...VERSION, ...FIRMWARE]);
    expect(pushed(session, [...analog(0, 1), ...analog(1, 2), ...analog(3, 3)])).toEqual([]);
  });
});

describe('a Firmata board that starts again', () => {
  it('is noticed by its version, and greeted and configured anew', () => {
    const session = greeted();
    expect(kinds(pushed(session, VERSION))).toEqual(['reboot']);
    expect(sent(pushed(session, FIRMWARE))).toEqual([ASK_MAPPING]);
    expect(kinds(pushed(session, MAPPING))).toEqual(['send', 'ready']);
  });

  it('is noticed by its firmware report, when its version was lost', () => {
    const session = greeted();
    expect(kinds(pushed(session, FIRMWARE))).toEqual(['reboot', 'send']);
    expect(kinds(pushed(session, MAPPING))).toEqual(['send', 'ready']);
  });

  it('has its servos configured anew', () => {
    const session = greeted(FOLLOWERS);
    const encode = (): number[] =>
      written(session, 0, (out) => session.encode(0, frameOf([1_500, 1_500, 1_500], [], 1), out));
    const first = encode();
    expect(encode()).not.toEqual(first);
    pushed(session, [...VERSION, ...FIRMWARE, ...MAPPING]);
    expect(encode()).toEqual(first);
  });

  it('is not seen in noise that merely has the form of a version report', () => {
    expect(pushed(greeted(), [0xf9, 9, 9])).toEqual([]);
  });
});

describe('servos on Firmata', () => {
  const config = (pin: number, min: number, max: number): number[] =>
    Array.of(0xf0, 0x70, pin, min & 0x7f, min >> 7, max & 0x7f, max >> 7, 0xf7);
  const position = (pin: number, us: number): number[] =>
    pin > 15 ? [0xf0, 0x6f, pin, us & 0x7f, us >> 7, 0xf7] : analog(pin, us);
  /** Puts the position into the slot that the next servo gets, on pin 13, which then lets go of it. */
  const primed = (min: number, max: number, us: number): number[] => [
    ...config(13, min, max),
    ...position(13, us),
    ...hex('f4 0d 01'),
  ];
  const encode = (session: WireSession, pulsing: number): number[] =>
    written(session, 0, (out) => session.encode(0, frameOf([1_500.4, 900.6, 2_000], [], pulsing), out));

  it('are configured and placed in one write, one after another while the arm wakes', () => {
    const session = greeted(FOLLOWERS);
    expect(encode(session, 0)).toEqual([]);
    expect(encode(session, 1)).toEqual([...primed(560, 2_440, 1_500), ...config(5, 560, 2_440), ...position(5, 1_500)]);
    expect(encode(session, 3)).toEqual([
      ...position(5, 1_500),
      ...primed(600, 2_400, 901),
      ...config(6, 600, 2_400),
      ...position(6, 901),
      ...primed(1_000, 2_000, 2_000),
      ...config(17, 1_000, 2_000),
      ...position(17, 2_000),
    ]);
    expect(encode(session, 3)).toEqual([...position(5, 1_500), ...position(6, 901), ...position(17, 2_000)]);
  });

  it('are not primed where pin 13 is in use, or unknown', () => {
    const onSpare: OutputWiring = { ...WREN, servos: [{ channel: 13, minUs: 600, maxUs: 2_400, joint: 'shoulder' }] };
    const powered: OutputWiring = { ...WREN, power: { channel: 13, on: 'high' } };
    const plain = [...config(5, 560, 2_440), ...position(5, 1_500)];
    expect(encode(greeted({ ...FOLLOWERS, outputs: [powered] }), 1)).toEqual(plain);
    expect(encode(greeted({ ...FOLLOWERS, outputs: [WREN, onSpare] }), 1)).toEqual(plain);
    const unmapped = opened(FOLLOWERS);
    pushed(unmapped, [...VERSION, ...FIRMWARE]);
    nudged(unmapped);
    expect(encode(unmapped, 1)).toEqual(plain);
  });

  it('are detached in the reverse order, left low, and configured again at the next command', () => {
    const session = greeted(FOLLOWERS);
    const first = encode(session, 3);
    expect(written(session, 0, (out) => session.limp(0, out))).toEqual([
      ...hex('f4 11 01  f4 06 01  f4 05 01'),
      // Ports 0 and 2 hold pins 5, 6 and 17.
      ...hex('90 00 00  92 00 00'),
    ]);
    expect(encode(session, 3)).toEqual(first);
  });

  it('are given limits that the AVR library can hold, widened to its steps of 4 us', () => {
    // (544 - min) / 4 and (2400 - max) / 4 are kept in 8 signed bits: arduino-libraries/Servo, src/avr/Servo.cpp.
    for (const [minUs, maxUs, configuredMin, configuredMax] of [
      [544, 2_400, 544, 2_400],
      [547, 2_401, 544, 2_404],
      [1_200, 1_800, 1_052, 1_892],
      [1_000, 2_000, 1_000, 2_000],
      [544, 2_912, 544, 2_912],
    ] as const) {
      const output: OutputWiring = { ...WREN, servos: [{ channel: 9, minUs, maxUs, joint: 'shoulder' }] };
      const session = greeted({ ...FOLLOWERS, outputs: [output] });
      const bytes = written(session, 0, (out) => session.encode(0, frameOf([1_500]), out));
      expect(bytes.slice(-11)).toEqual([...config(9, configuredMin, configuredMax), ...position(9, 1_500)]);
      for (const held of [(544 - configuredMin) / 4, (2_400 - configuredMax) / 4]) {
        expect(held).toBe(Math.trunc(held));
        expect(Math.abs(held)).toBeLessThanOrEqual(128);
      }
    }
  });

  it('are never sent in a sysex that firmware cuts off, nor with a byte over 127 inside', () => {
    const servos = Array.from({ length: 48 }, (_, index) => ({
      // All but 13, on which each is primed.
      channel: index < 11 ? 2 + index : 3 + index,
      minUs: 544,
      maxUs: 2_912,
      joint: 'shoulder',
    }));
    const session = greeted({ ...FOLLOWERS, outputs: [{ ...WREN, servos }] });
    const bytes = written(session, 0, (out) => session.encode(0, frameOf(servos.map(() => 2_912)), out));
    const sysexes =
      Buffer.from(bytes)
        .toString('latin1')
        .match(/\xf0[^\xf7]*\xf7/g) ?? [];
    expect(sysexes.length).toBe(2 * 48 + 35);
    for (const sysex of sysexes) {
      // MAX_DATA_BYTES of FirmataConstants.h.
      expect(sysex.length).toBeLessThanOrEqual(64);
      expect(Math.max(...Buffer.from(sysex.slice(1, -1), 'latin1'))).toBeLessThan(0x80);
    }
  });
});

describe('power on Firmata', () => {
  const power = (session: WireSession, output: number, on: boolean): number[] =>
    written(session, output, (out) => session.power(output, on, out));

  it('is a digital output, whose mode is set once', () => {
    const session = greeted(FOLLOWERS);
    expect(power(session, 0, true)).toEqual([0xf4, 7, 1, 0x90, 0, 1]);
    expect(power(session, 0, false)).toEqual([0x90, 0, 0]);
  });

  it('leaves the other outputs of its port as they are, a low-active one off at first', () => {
    const heron: OutputWiring = { ...WREN, follower: 'heron', power: { channel: 4, on: 'low' } };
    const session = greeted({ ...FOLLOWERS, outputs: [WREN, heron] });
    expect(power(session, 0, true)).toEqual([0xf4, 7, 1, 0x90, 0x10, 1]);
    expect(power(session, 1, true)).toEqual([0xf4, 4, 1, 0x90, 0x00, 1]);
    expect(power(session, 0, false)).toEqual([0x90, 0x00, 0]);
    expect(power(session, 1, false)).toEqual([0x90, 0x10, 0]);
  });

  it('stays on while the servos of the same port go limp', () => {
    const session = greeted(FOLLOWERS);
    power(session, 0, true);
    expect(written(session, 0, (out) => session.limp(0, out)).slice(-6)).toEqual([0x90, 0, 1, 0x92, 0, 0]);
  });

  it('is nothing for a follower without it', () => {
    const session = greeted({ ...FOLLOWERS, outputs: [{ ...WREN, power: null }] });
    expect(power(session, 0, true)).toEqual([]);
  });
});

describe('bytes that are no message', () => {
  it('are told: orphans, cut messages and endless ones', () => {
    const session = greeted();
    expect(pushed(session, [1, 2, 3, ...analog(0, 1)])).toEqual([{ kind: 'garbled', bytes: 3, why: 'syntax' }]);
    expect(pushed(session, [0xe1, 5, ...analog(1, 1)])).toEqual([{ kind: 'garbled', bytes: 2, why: 'cut' }]);
    expect(
      pushed(session, [0xf0, 0x6c, 1, ...analog(1, 1)]).map((event) =>
        event.kind === 'garbled' ? event.why : event.kind,
      ),
    ).toContain('cut');
    const endless = pushed(session, [0xf0, ...Array<number>(SYSEX_BYTES_MAX + 10).fill(1), 0xf7]);
    expect(endless).toEqual([
      { kind: 'garbled', bytes: SYSEX_BYTES_MAX, why: 'oversize' },
      { kind: 'garbled', bytes: 10, why: 'oversize' },
    ]);
  });

  it('are no fault before the board has greeted', () => {
    expect(pushed(opened(), [1, 2, 0xe1, 0xf8, 3, 0xff])).toEqual([]);
  });
});

describe('an echo over Firmata', () => {
  it('asks for a pin state and takes the answer for it', () => {
    const session = greeted();
    expect(written(session, 0, (out) => session.echo(9, out))).toEqual([0xf0, 0x6d, 9, 0xf7]);
    expect(pushed(session, [0xf0, 0x6e, 9, 4, 0, 0xf7])).toEqual([{ kind: 'echo', id: 9, boardUs: Number.NaN }]);
  });
});
