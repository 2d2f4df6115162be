/** The project's own Firmata wire against the firmware: what it says is judged from the pins, what it hears from the volts. */
import { describe, expect, it } from 'vitest';
import { virtualClock } from '../../src/clock/virtual.ts';
import type { VirtualClock } from '../../src/clock/virtual.ts';
import { firmataSession } from '../../src/wire/firmata.ts';
import type { Frame, OutputWiring, WireEvent, WireSession } from '../../src/wire/types.ts';
import { BOOT_US, median } from './solo.ts';
import { unoBoard } from './uno.ts';
import type { UnoBoard } from './uno.ts';
import { standardFirmata } from './wired.ts';

const FRAME_US = 20_000;
const NEAR_US = 15;

const servo = (channel: number, joint: string) => ({ channel, minUs: 600, maxUs: 2400, joint });

/** One board with both ends: three pots, and two followers with a relay each, one of them active-low. */
const wren: OutputWiring = {
  follower: 'wren',
  joints: ['shoulder', 'elbow'],
  servos: [servo(3, 'shoulder'), servo(9, 'elbow')],
  power: { channel: 7, on: 'high' },
};
const heron: OutputWiring = {
  follower: 'heron',
  joints: ['shoulder'],
  servos: [servo(10, 'shoulder')],
  power: { channel: 4, on: 'low' },
};
const WREN = 0;
const HERON = 1;

interface Spoken {
  readonly clock: VirtualClock;
  readonly board: UnoBoard;
  readonly session: WireSession;
  /** Kinds of the events told so far, readings left out. */
  readonly told: string[];
  readonly readings: number[][];
  command(output: number, pulsesUs: readonly number[], pulsing?: number): Frame;
  limp(output: number): void;
  power(output: number, on: boolean): void;
  wait(us: number): void;
}

function spoken(): Spoken {
  const clock = virtualClock();
  const session = firmataSession({
    boardName: 'StandardFirmata',
    inputs: { channels: [0, 2, 5], names: ['shoulder', 'elbow', 'pedal'], samplingMs: 10 },
    outputs: [wren, heron],
  });
  const told: string[] = [];
  const readings: number[][] = [];
  const emit = (event: WireEvent): void => {
    if (event.kind === 'reading') readings.push([...event.counts]);
    else if (event.kind === 'send') board.receive(event.bytes);
    else told.push(event.kind === 'ready' ? `ready ${event.board}` : event.kind);
  };
  const board = unoBoard({ clock, flash: standardFirmata, send: (bytes) => session.push(bytes, emit) });
  const out = new Uint8Array(Math.max(session.frameBytesMax(WREN), session.frameBytesMax(HERON)));
  const say = (length: number): void => board.receive(out.subarray(0, length));
  board.reset();
  session.open(emit);
  clock.runTo(BOOT_US);
  return {
    clock,
    board,
    session,
    told,
    readings,
    command(output, pulsesUs, pulsing = pulsesUs.length) {
      const frame: Frame = {
        pulsesUs: Float64Array.from(pulsesUs),
        sentUs: new Float64Array(pulsesUs.length),
        anglesRad: new Float64Array(pulsesUs.length),
        pulsing,
      };
      say(session.encode(output, frame, out));
      return frame;
    },
    limp: (output) => say(session.limp(output, out)),
    power: (output, on) => say(session.power(output, on, out)),
    wait: (us) => clock.runTo(clock.nowUs() + us),
  };
}

const widthsSince = ({ board }: Spoken, pin: number, sinceUs: number): number[] =>
  board
    .pulses(pin)
    .filter((pulse) => pulse.startUs >= sinceUs)
    .map((pulse) => pulse.widthUs);

function expectAllNear(widths: readonly number[], askedUs: number): void {
  expect(widths.length).toBeGreaterThan(0);
  for (const width of widths) expect(Math.abs(width - askedUs)).toBeLessThanOrEqual(NEAR_US);
}

describe('the firmata wire on real firmware', () => {
  it('is ready when the board has greeted, and reads every pot within one count', () => {
    const at = spoken();
    expect(at.told).toEqual(['ready StandardFirmata']);
    at.board.setVolts(0, 1.25);
    at.board.setVolts(2, 4.9);
    at.board.setVolts(5, 0.1);
    at.wait(50_000);
    at.readings.length = 0;
    at.wait(500_000);
    // ATmega328P datasheet, "ADC Conversion Result": 1.25 * 1024 / 5 = 256, 4.9 gives 1003.52, 0.1 gives 20.48.
    for (const reading of at.readings) {
      for (const [input, exact] of [256, 1003.52, 20.48].entries()) {
        expect(Math.abs((reading[input] as number) - exact)).toBeLessThanOrEqual(1);
      }
    }
    // Asked for 10 ms, which this firmware can do.
    expect(Math.abs(at.readings.length - 50)).toBeLessThanOrEqual(1);
  });

  it('gives the pulse it says it sent: the median within 1 us, each within 10', () => {
    const at = spoken();
    for (const asked of [600, 1234.4, 2399.6]) {
      const { sentUs } = at.command(WREN, [asked, 3000 - asked]);
      at.wait(60_000);
      const sinceUs = at.clock.nowUs();
      at.wait(1_020_000);
      for (const [servoIndex, pin] of [3, 9].entries()) {
        const widths = widthsSince(at, pin, sinceUs).slice(0, 50);
        expect(widths.length).toBe(50);
        expect(Math.abs(median(widths) - (sentUs[servoIndex] as number))).toBeLessThanOrEqual(1);
        for (const width of widths) expect(Math.abs(width - (sentUs[servoIndex] as number))).toBeLessThanOrEqual(10);
      }
    }
  });

  it('wakes a servo beside a running one with the right first pulse, at every phase of the frame and while pots stream', () => {
    const at = spoken();
    at.command(WREN, [1200, 900], 1);
    at.wait(100_000);
    for (let phaseUs = 0; phaseUs < FRAME_US; phaseUs += 250) {
      const startUs = at.board.pulses(3).at(-1)?.startUs ?? Number.NaN;
      at.clock.runTo(Math.ceil(startUs + FRAME_US + phaseUs));
      const sinceUs = at.clock.nowUs();
      // Another pulse each time, so a slot that still has the former one is found out.
      const us = phaseUs % 500 === 0 ? 2000 : 800;
      at.command(HERON, [us]);
      at.wait(2 * FRAME_US + 5_000);
      expectAllNear(widthsSince(at, 10, sinceUs), us);
      at.limp(HERON);
      at.wait(5_000);
    }
    expectAllNear(widthsSince(at, 3, BOOT_US), 1200);
    expect(at.board.pulses(9)).toEqual([]);
    expect(at.board.level(13)).toBe('low');
  });

  it('ends the pulses of one follower and leaves the other its own', () => {
    const at = spoken();
    at.command(WREN, [1100, 1300]);
    at.command(HERON, [1700]);
    at.wait(200_000);
    at.limp(WREN);
    at.wait(10_000);
    const sinceUs = at.clock.nowUs();
    at.wait(200_000);
    expect([at.board.level(3), at.board.level(9)]).toEqual(['low', 'low']);
    expect([...widthsSince(at, 3, sinceUs), ...widthsSince(at, 9, sinceUs)]).toEqual([]);
    expectAllNear(widthsSince(at, 10, sinceUs), 1700);
  });

  it('switches each relay alone, whichever level closes it', () => {
    const at = spoken();
    const relays = (): string[] => [at.board.level(7), at.board.level(4)];
    // The boot has driven every pin low, so the active-low relay is closed until the wire says anything about power.
    expect(relays()).toEqual(['low', 'low']);
    const steps = [
      [WREN, true, ['high', 'high']],
      [HERON, false, ['high', 'high']],
      [WREN, false, ['low', 'high']],
      [HERON, true, ['low', 'low']],
    ] as const;
    for (const [output, on, expected] of steps) {
      at.power(output, on);
      at.wait(10_000);
      expect(relays(), `output ${output} ${on ? 'on' : 'off'}`).toEqual(expected);
    }
  });

  it('notices a board that restarts in mid-run and greets it anew', () => {
    const at = spoken();
    at.command(WREN, [1100, 1300]);
    at.wait(100_000);
    at.board.reset();
    at.wait(BOOT_US);
    expect(at.told).toEqual(['ready StandardFirmata', 'reboot', 'ready StandardFirmata']);
    at.readings.length = 0;
    at.wait(100_000);
    expect(at.readings.length).toBeGreaterThan(5);
    const sinceUs = at.clock.nowUs();
    at.command(WREN, [1400, 1600]);
    at.wait(200_000);
    expectAllNear(widthsSince(at, 3, sinceUs), 1400);
    expectAllNear(widthsSince(at, 9, sinceUs), 1600);
  });
});
