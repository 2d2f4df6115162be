import { EventEmitter } from 'node:events';
import { Firmata } from 'firmata-io';
import { describe, expect, it } from 'vitest';
import { virtualClock } from '../../src/clock/virtual.ts';
import { simulatedBoard } from '../../src/sim/board.ts';
import { armServo, DEG, HAND, PLAN, S, simAddress, WIRES } from './troupe.ts';

const MODE_OUTPUT = 1;

/** A general-purpose Firmata client drives the simulated board: a second opinion on the board's side of the wire. */
function connected() {
  const clock = virtualClock();
  const board = simulatedBoard({
    clock,
    address: simAddress('sim:arm?seed=3'),
    wire: WIRES.firmata,
    plan: PLAN,
    hand: HAND,
    arms: [{ name: 'wren', servos: [armServo(0, -60), armServo(1, 30)] }],
  });
  const queue: Buffer[] = [];
  const flush = (): void => {
    const next = queue[0];
    if (next !== undefined && board.port.write(next)) queue.shift();
  };
  const transport = Object.assign(new EventEmitter(), {
    write(bytes: Buffer) {
      queue.push(Buffer.from(bytes));
      flush();
    },
  });
  board.port.start({
    opened() {},
    data: (bytes) => transport.emit('data', [...bytes]),
    idle: flush,
    closed() {},
  });
  // The pins of an Arduino Mega, whose analog inputs begin at pin 54.
  const analogPins = Array.from({ length: 16 }, (_, channel) => 54 + channel);
  const client = new Firmata(transport, { skipCapabilities: true, pinCount: 70, analogPins });
  clock.runTo(S);
  const run = (seconds: number): void => clock.runTo(clock.nowUs() + seconds * S);
  return { client, board, run };
}

describe('a third-party Firmata client on the simulated board', () => {
  it('is greeted', () => {
    expect(connected().client.isReady).toBe(true);
  });

  it('is sent the channel it asks for, at the interval it asks for', () => {
    const { client, run } = connected();
    const counts: number[] = [];
    client.on('analog-read-3', (value: number) => counts.push(value));
    client.setSamplingInterval(10);
    client.reportAnalogPin(3, 1);
    run(2);
    // Two seconds of 10 ms, and one report at once.
    expect(counts.length).toBeGreaterThan(195);
    expect(counts.length).toBeLessThan(205);
    expect(counts.every((value) => Number.isInteger(value) && value >= 0 && value <= 1023)).toBe(true);
    client.reportAnalogPin(3, 0);
    const before = counts.length;
    run(1);
    expect(counts.length).toBeLessThanOrEqual(before + 1);
  });

  it('turns a servo on a low and on a high pin, once power is on', () => {
    const { client, board, run } = connected();
    const [arm] = board.arms;
    client.pinMode(8, MODE_OUTPUT);
    client.digitalWrite(8, 1);
    client.servoConfig(5, 544, 2400);
    client.servoWrite(5, 1472);
    client.servoConfig(21, 544, 2400);
    client.servoWrite(21, 2400);
    run(2);
    expect(arm?.powered).toBe(true);
    expect(arm?.pulseUs(0)).toBe(1472);
    expect(Math.abs((arm?.angleRad(0) ?? Number.NaN) / DEG)).toBeLessThan(1);
    expect(arm?.pulseUs(1)).toBe(2400);
    // 544 us lie at -90 degrees and 2400 us at 90: write(90) is 1472 us, the middle.
    client.servoWrite(5, 90);
    run(1);
    expect(arm?.pulseUs(0)).toBe(1472);
    client.digitalWrite(8, 0);
    run(1);
    expect(arm?.powered).toBe(false);
  });
});
