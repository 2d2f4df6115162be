/**
 * Stops of all three categories, by a pedal and by a key, judged from the pins: an arm that brakes and holds, one that brakes
 * and lets its power go, one whose power goes at once. The latter two share a board.
 */
import { beforeAll, describe, expect, it } from 'vitest';
import { calm, effort, pulseAt, settledUs, trainOf, widthsOf } from './trains.ts';
import { troupe, voltsOf } from './troupe.ts';
import type { Troupe } from './troupe.ts';
import type { UnoBoard } from './uno.ts';

const RIG = `
rig: stops
leader:
  leader: handstick
  port: serial:/dev/ttyACM0
  wire: firmata
  joints:
    - { name: shoulder, channel: 0, points: [[112, -120], [912, 120]] }
  buttons:
    - { name: pedal, channel: 5, pressed: below, counts: 300, does: stop }
followers:
  - follower: wren
    port: serial:/dev/ttyACM1
    wire: firmata
    stop_category: 2
    join: { speed: 1 }
    joints:
      - name: shoulder
        from: shoulder
        range_deg: [-85, 85]
        speed_deg_s: 60
        accel_deg_s2: 240
        servo: { channel: 3, points: [[-90, 560], [90, 2440]] }
  - follower: heron
    port: serial:/dev/ttyACM2
    wire: firmata
    stop_category: 1
    power: { channel: 7, on: high }
    join: { speed: 1 }
    joints:
      - name: shoulder
        from: shoulder
        range_deg: [-85, 85]
        speed_deg_s: 60
        accel_deg_s2: 240
        servo: { channel: 5, points: [[-90, 560], [90, 2440]] }
  - follower: stork
    port: serial:/dev/ttyACM2
    wire: firmata
    stop_category: 0
    power: { channel: 4, on: low }
    join: { speed: 1 }
    joints:
      - name: shoulder
        from: shoulder
        range_deg: [-85, 85]
        speed_deg_s: 60
        accel_deg_s2: 240
        servo: { channel: 6, points: [[-90, 560], [90, 2440]] }
`;
const WREN = 3;
const HERON = 5;
const HERON_POWER = 7;
const STORK = 6;
const STORK_POWER = 4;
const PEDAL = 5;
const RELEASED_VOLTS = 4;
const PRESSED_VOLTS = 0.5;

const US_PER_DEG = 1880 / 180;
const SPEED_US_S = 60 * US_PER_DEG;
const LIMITS = { speed: SPEED_US_S, accel: 240 * US_PER_DEG, commandUs: 22_000 };
/** v^2 / 2A = 60^2 / 480 = 7.5 degrees, in 60 / 240 = 0.25 s. */
const BRAKING_US = 7.5 * US_PER_DEG;
const BRAKING_TIME_US = 250_000;
/** The board is asked for a reading every 10 ms, and speaks it in six bytes. */
const READING_US = 10_000 + 2_000;
const COMMAND_US = 20_000;
const FRAME_US = 20_000;
/** Three to nine bytes at 173.6 us, and the firmware's own loop. */
const LINE_US = 3_000;
const NEAR_US = 10;
/** Calm pulses this close are one position; a braking arm needs sqrt(2 * 2 / (240 * 10.4)) = 40 ms for the last of it. */
const STILL_US = 2;
const STILL_TIME_US = 40_000;

describe('a stop on real firmware', () => {
  let all: Troupe;
  let small: UnoBoard;
  let large: UnoBoard;
  const now = (): number => all.clock.nowUs();

  /** Sends the hand far away and stops in the midst of the arms' way, at full speed; then the hand waves on. */
  const stopInFullSpeed = (counts: number, stop: () => void): number => {
    all.turn(counts);
    all.wait(700_000);
    stop();
    const stopUs = now();
    wave();
    all.wait(1_200_000);
    return stopUs;
  };

  /** 300 counts, or 90 degrees, to either side at 0.6 Hz: 340 deg/s at most, which no pot's health is asked about. */
  const wave = (): void => {
    const sinceUs = now();
    all.sway(0, (atUs) => voltsOf(512 + 300 * Math.sin(((atUs - sinceUs) / 1e6) * 2 * Math.PI * 0.6)));
  };

  const expectNoMotion = (board: UnoBoard, pin: number, fromUs: number, usThen: number): void => {
    const train = trainOf(board, pin, fromUs);
    expect(train.length).toBeGreaterThan(10);
    for (const { widthUs } of train) expect(Math.abs(widthUs - usThen)).toBeLessThanOrEqual(NEAR_US);
  };

  /** Brakes inside its limits from full speed; returns when the servo knew its last new pulse. */
  const expectBraking = (board: UnoBoard, pin: number, stopUs: number, sensedUs: number): number => {
    const train = trainOf(board, pin, stopUs - 600_000);
    const { speed, accel } = effort(train, 10, LIMITS);
    expect(speed).toBeLessThanOrEqual(1);
    expect(accel).toBeLessThanOrEqual(1);
    const before = pulseAt(board, pin, stopUs).widthUs;
    const goneUs = Math.abs((train.at(-1)?.widthUs ?? Number.NaN) - before);
    // Until the first braking command is on the pin the arm runs on; at most so long was the last pulse old as well.
    const latestUs = sensedUs + COMMAND_US + LINE_US + FRAME_US;
    expect(goneUs).toBeGreaterThan(BRAKING_US - NEAR_US);
    expect(goneUs).toBeLessThan(BRAKING_US + (SPEED_US_S * latestUs) / 1e6 + NEAR_US);
    const stoodUs = settledUs(calm(train), STILL_US);
    expect(stoodUs - stopUs).toBeLessThan(latestUs + BRAKING_TIME_US);
    return stoodUs;
  };

  beforeAll(() => {
    all = troupe(RIG);
    all.turn(512);
    all.until('the ports are open', 100_000, () => all.words.length === 3);
    all.sway(PEDAL, () => RELEASED_VOLTS);
    all.until('the boards answer', 3_000_000, () => ['wren', 'heron', 'stork'].every((f) => all.state(f) === 'waking'));
    all.wait(50_000);
    small = all.at('serial:/dev/ttyACM1').board;
    large = all.at('serial:/dev/ttyACM2').board;
  });

  it('finds the power off before the go and on after it, whichever level switches it on', () => {
    expect([large.level(HERON_POWER), large.level(STORK_POWER)]).toEqual(['low', 'high']);
    all.key('go');
    all.until('all follow', 3_000_000, () => ['wren', 'heron', 'stork'].every((f) => all.state(f) === 'following'));
    expect([large.level(HERON_POWER), large.level(STORK_POWER)]).toEqual(['high', 'low']);
    // Power comes before the first pulse.
    const powered = large.changes(HERON_POWER).findLast(({ level }) => level === 'high')?.atUs ?? Number.NaN;
    expect(large.pulses(HERON)[0]?.startUs).toBeGreaterThan(powered);
  });

  describe('by a pedal', () => {
    let stopUs: number;
    beforeAll(() => {
      stopUs = stopInFullSpeed(850, () => all.sway(PEDAL, () => PRESSED_VOLTS));
      all.sway(PEDAL, () => RELEASED_VOLTS);
      all.wait(100_000);
    });

    it('of category 2 brakes within v^2 / 2A, then stands, power and pulses kept', () => {
      const stoodUs = expectBraking(small, WREN, stopUs, READING_US);
      expectNoMotion(small, WREN, stoodUs, pulseAt(small, WREN, now()).widthUs);
    });

    it('of category 1 brakes the same way, and only then its power goes and its pulses end', () => {
      const stoodUs = expectBraking(large, HERON, stopUs, READING_US);
      const offUs = large.changes(HERON_POWER).at(-1)?.atUs ?? Number.NaN;
      expect(large.level(HERON_POWER)).toBe('low');
      expect(offUs).toBeGreaterThan(stopUs + BRAKING_TIME_US);
      expect(offUs - stoodUs).toBeLessThan(STILL_TIME_US + COMMAND_US + LINE_US);
      expect(trainOf(large, HERON, offUs + COMMAND_US + LINE_US)).toEqual([]);
      expect(large.level(HERON)).toBe('low');
    });

    it('of category 0 takes the power as soon as the pedal is read, and the pulses after it', () => {
      const offUs = large.changes(STORK_POWER).at(-1)?.atUs ?? Number.NaN;
      expect(large.level(STORK_POWER)).toBe('high');
      expect(offUs).toBeGreaterThan(stopUs);
      expect(offUs).toBeLessThan(stopUs + READING_US + LINE_US);
      expect(trainOf(large, STORK, offUs + LINE_US)).toEqual([]);
      expect(large.level(STORK)).toBe('low');
      console.log(`from the pedal to the power pin: ${((offUs - stopUs) / 1000).toFixed(1)} ms`);
    });

    it('is not undone by rearming alone', () => {
      const stood = pulseAt(small, WREN, now()).widthUs;
      const rearmedUs = now();
      all.key('rearm');
      all.wait(400_000);
      expect(['wren', 'heron', 'stork'].map(all.state)).toEqual(['holding', 'waking', 'waking']);
      expectNoMotion(small, WREN, rearmedUs, stood);
      expect([...trainOf(large, HERON, rearmedUs), ...trainOf(large, STORK, rearmedUs)]).toEqual([]);
      expect([large.level(HERON_POWER), large.level(STORK_POWER)]).toEqual(['low', 'high']);
    });

    it('ends with join: the held arm moves, the others wait without power for their go', () => {
      const joinedUs = now();
      const stood = pulseAt(small, WREN, joinedUs).widthUs;
      all.key('join');
      all.wait(800_000);
      const moved = widthsOf(trainOf(small, WREN, joinedUs)).map((width) => Math.abs(width - stood));
      expect(Math.max(...moved)).toBeGreaterThan(10 * US_PER_DEG);
      expect([...trainOf(large, HERON, joinedUs), ...trainOf(large, STORK, joinedUs)]).toEqual([]);
    });

    it('leaves an arm whose power was cut to wake at its last pulse', () => {
      const last = [HERON, STORK].map((pin) => widthsOf(large.pulses(pin)).at(-2) ?? Number.NaN);
      const goUs = now();
      all.key('go');
      all.wait(200_000);
      for (const [arm, pin] of [HERON, STORK].entries()) {
        const first = trainOf(large, pin, goUs)[0]?.widthUs ?? Number.NaN;
        // The last but one pulse was one command old; a cut one tells nothing.
        expect(Math.abs(first - (last[arm] as number))).toBeLessThan((SPEED_US_S * 2 * FRAME_US) / 1e6 + NEAR_US);
      }
      expect([large.level(HERON_POWER), large.level(STORK_POWER)]).toEqual(['high', 'low']);
    });
  });

  describe('by a key', () => {
    let stopUs: number;
    beforeAll(() => {
      all.turn(200);
      all.until('all follow', 4_000_000, () => ['wren', 'heron', 'stork'].every((f) => all.state(f) === 'following'));
      all.wait(1_000_000);
      stopUs = stopInFullSpeed(880, () => all.key('stop', 'wren'));
    });

    it('brakes one arm, which then stands, whatever the hand does', () => {
      const stoodUs = expectBraking(small, WREN, stopUs, 0);
      expectNoMotion(small, WREN, stoodUs, pulseAt(small, WREN, now()).widthUs);
      expect(all.state('wren')).toBe('stopped');
    });

    it('leaves the other arms following', () => {
      for (const pin of [HERON, STORK]) {
        const widths = widthsOf(trainOf(large, pin, stopUs + BRAKING_TIME_US));
        expect(Math.max(...widths) - Math.min(...widths)).toBeGreaterThan(20 * US_PER_DEG);
      }
    });
  });
});
