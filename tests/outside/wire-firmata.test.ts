import { EventEmitter } from 'node:events';
import fc from 'fast-check';
import { Firmata } from 'firmata-io';
import { describe, expect, it } from 'vitest';
import { putAnalog, putDigital, putPinMode, putServoConfig } from '../../src/wire/firmata-messages.ts';
import { firmataReader } from '../../src/wire/firmata-reader.ts';
import { openSession } from '../../src/wire/session.ts';
import type { BoardPlan, WireEvent } from '../../src/wire/types.ts';

/** Sources: firmata/protocol, protocol.md and servos.md (2.8.0); npm firmata-io 2.3.0 on a recording transport. */

function bytesOf(put: (out: Uint8Array, at: number) => number): string {
  const out = new Uint8Array(64);
  return Buffer.from(out.subarray(0, put(out, 0))).toString('hex');
}

function hex(text: string): string {
  return text.replaceAll(' ', '').toLowerCase();
}

/** protocol.md: version report, firmware report of "Std" 2.5. */
const GREETING = 'F9 02 05 F0 79 02 05 53 00 74 00 64 00 F7';

class RecordingTransport extends EventEmitter {
  sent: number[] = [];
  write(bytes: Buffer): void {
    this.sent.push(...bytes);
  }
}

interface Recorded {
  readonly transport: RecordingTransport;
  readonly board: Firmata;
  /** What the calls since the last look put on the wire, in hexadecimal. */
  taken(): string;
}

function recorded(): Recorded {
  const transport = new RecordingTransport();
  const board = new Firmata(transport, { skipCapabilities: true, analogPins: [0, 1] });
  // It makes up its pins once the board has greeted.
  transport.emit('data', [...Buffer.from(hex(GREETING), 'hex')]);
  const taken = (): string => Buffer.from(transport.sent.splice(0)).toString('hex');
  taken();
  return { transport, board, taken };
}

const PLAN: BoardPlan = {
  boardName: null,
  inputs: { channels: [0, 1], names: ['shoulder', 'elbow'], samplingMs: 19 },
  outputs: [
    {
      follower: 'wren',
      joints: ['shoulder'],
      servos: [{ channel: 9, minUs: 544, maxUs: 2_400, joint: 'shoulder' }],
      power: null,
    },
  ],
};

function pushAll(texts: readonly string[], plan = PLAN): WireEvent[] {
  const session = openSession({ name: 'firmata' }, plan);
  const events: WireEvent[] = [];
  session.open(() => {});
  for (const text of texts) {
    session.push(Buffer.from(hex(text), 'hex'), (event) =>
      events.push(event.kind === 'send' ? { ...event, bytes: event.bytes.slice() } : { ...event }),
    );
  }
  return events;
}

function sentBy(events: readonly WireEvent[]): string[] {
  return events.flatMap((event) => (event.kind === 'send' ? [Buffer.from(event.bytes).toString('hex')] : []));
}

describe('bytes of the published Firmata protocol', () => {
  it('configure a servo', () => {
    // servos.md, servo config; values as firmata-io writes them.
    expect(bytesOf((out, at) => putServoConfig(9, 544, 2_400, out, at))).toBe(hex('F0 70 09 20 04 60 12 F7'));
    expect(bytesOf((out, at) => putServoConfig(9, 1_000, 2_000, out, at))).toBe(hex('F0 70 09 68 07 50 0F F7'));
  });

  it('place a servo, on a pin above 15 by extended analog', () => {
    // servos.md: the analog message, or extended analog for pins above 15; values as firmata-io writes them.
    expect(bytesOf((out, at) => putAnalog(9, 90, out, at))).toBe(hex('E9 5A 00'));
    expect(bytesOf((out, at) => putAnalog(9, 1_500, out, at))).toBe(hex('E9 5C 0B'));
    expect(bytesOf((out, at) => putAnalog(16, 1_500, out, at))).toBe(hex('F0 6F 10 5C 0B F7'));
    expect(bytesOf((out, at) => putAnalog(17, 1_023, out, at))).toBe(hex('F0 6F 11 7F 07 F7'));
  });

  it('carry 14 bits as two sevens, the low ones first', () => {
    // protocol.md, analog 14-bit data format; computed.
    for (const [channel, value, text] of [
      [0, 1_023, 'E0 7F 07'],
      [3, 512, 'E3 00 04'],
      [1, 16_383, 'E1 7F 7F'],
      [2, 8_192, 'E2 00 40'],
    ] as const) {
      expect(bytesOf((out, at) => putAnalog(channel, value, out, at))).toBe(hex(text));
      const reader = firmataReader();
      reader.read(Buffer.from(hex(text), 'hex'), 0);
      expect([reader.found, reader.command, reader.channel]).toEqual(['message', 0xe0, channel]);
      expect((reader.data[0] as number) + (reader.data[1] as number) * 128).toBe(value);
    }
  });

  it('ask a silent board for its version and firmware', () => {
    // protocol.md, request version report and query firmware.
    const session = openSession({ name: 'firmata' }, PLAN);
    const events: WireEvent[] = [];
    session.open(() => {});
    session.nudge((event) => events.push(event));
    expect(sentBy(events)).toEqual([hex('F9 F0 79 F7')]);
  });

  it('name the firmware, and configure its inputs', () => {
    // protocol.md: version report, firmware report ("Std" 2.5), analog mapping query and response, sampling interval,
    // set pin mode (ANALOG is 0x02 in its list of modes, though its prose once says 0x03), toggle analog reporting.
    const events = pushAll(['F9 02 05', 'F0 79 02 05 53 00 74 00 64 00 F7', 'F0 6A 00 01 7F F7']);
    expect(sentBy(events)).toEqual([hex('F0 69 F7'), hex('F0 7A 13 00 F7  F4 00 02 F4 01 02  C0 01 C1 01')]);
    expect(events.at(-1)).toEqual({ kind: 'ready', board: 'Std' });
  });

  it('set the sampling interval', () => {
    // protocol.md, sampling interval; values as firmata-io writes them.
    for (const [samplingMs, text] of [
      [10, 'F0 7A 0A 00 F7'],
      [1_000, 'F0 7A 68 07 F7'],
    ] as const) {
      const plan = { ...PLAN, inputs: { channels: [5], names: ['shoulder'], samplingMs } };
      const [, configuration] = sentBy(pushAll(['F0 79 02 05 53 00 F7', 'F0 6A 7F F7'], plan));
      expect(configuration).toBe(hex(text));
    }
  });
});

describe('the npm package firmata-io', () => {
  it('writes the same servo configuration and positions', () => {
    const { board, taken } = recorded();
    const pin = fc.integer({ min: 0, max: 63 });
    const us = fc.integer({ min: 544, max: 2_912 });
    fc.assert(
      fc.property(pin, us, us, (channel, minUs, maxUs) => {
        board.servoConfig(channel, minUs, maxUs);
        expect(taken()).toBe(bytesOf((out, at) => putServoConfig(channel, minUs, maxUs, out, at)));
        board.servoWrite(channel, maxUs);
        expect(taken()).toBe(bytesOf((out, at) => putAnalog(channel, maxUs, out, at)));
      }),
    );
  });

  it('writes the same pin modes, report switches, sampling intervals and port levels', () => {
    const { board, taken } = recorded();
    board.pinMode(7, 1);
    expect(taken()).toBe(bytesOf((out, at) => putPinMode(7, 1, out, at)));
    board.digitalWrite(7, 1);
    expect(taken()).toBe(bytesOf((out, at) => putDigital(0, 0x80, out, at)));
    board.setSamplingInterval(19);
    board.reportAnalogPin(0, 1);
    board.reportAnalogPin(1, 1);
    const [, configuration] = sentBy(pushAll(['F0 79 02 05 53 00 F7', 'F0 6A 00 01 F7']));
    expect(configuration?.replace(hex('F4 00 02 F4 01 02'), '')).toBe(taken());
  });

  it('reads the same firmware name', () => {
    const { board } = recorded();
    const { name } = (board as Firmata & { firmware: { name: string } }).firmware;
    expect(pushAll([GREETING, 'F0 6A 00 01 F7']).at(-1)).toEqual({ kind: 'ready', board: name });
  });

  it('reads the same counts', () => {
    const { transport, board } = recorded();
    const theirs: number[] = [];
    board.on('analog-read', ({ value }: { value: number }) => theirs.push(value));
    const session = openSession({ name: 'firmata' }, PLAN);
    session.open(() => {});
    session.push(Buffer.from(hex(`${GREETING} F0 6A 00 01 F7`), 'hex'), () => {});
    const count = fc.integer({ min: 0, max: 16_383 });
    fc.assert(
      fc.property(count, count, (first, second) => {
        const bytes = [0xe0, first % 128, first >> 7, 0xe1, second % 128, second >> 7];
        transport.emit('data', bytes);
        const ours: number[] = [];
        session.push(Uint8Array.from(bytes), (event) => event.kind === 'reading' && ours.push(...event.counts));
        expect(ours).toEqual(theirs.splice(0));
        expect(ours).toEqual([first, second]);
      }),
    );
  });
});
