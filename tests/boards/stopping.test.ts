/**
 * Stops of all three categories, by a pedal and by a key, judged from the pins: an arm that brakes and holds, one that brakes
 * and lets its power go, one whose power goes at once. The latter two share a board.
 */
import { beforeAll, describe, expect, it } from 'vitest';
import {
  BRAKING_TIME_US,
  expectBrakeAndHold,
  expectBraking,
  expectStill,
  SPEED_US_S,
  STILL_TIME_US,
} from './braking.ts';
import { AGE_US, COMMAND_US, FRAME_US, LINE_US, NEAR_US, READING_US, US_PER_DEG } from './timing.ts';
import { pulseAt, trainOf, widthsOf } from './trains.ts';
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
      expectBrakeAndHold(small, WREN, stopUs, [0, READING_US]);
    });

    it('of category 1 brakes the same way, and only then its power goes and its pulses end', () => {
      const offUs = large.changes(HERON_POWER).at(-1)?.atUs ?? Number.NaN;
      const stoodUs = expectBraking(large, HERON, stopUs, [0, READING_US], offUs - FRAME_US);
      expect(large.level(HERON_POWER)).toBe('low');
      expect(offUs).toBeGreaterThan(stopUs + BRAKING_TIME_US);
      expect(offUs - stoodUs).toBeLessThan(STILL_TIME_US + FRAME_US + 2 * COMMAND_US + LINE_US);
      expect(trainOf(large, HERON, offUs + LINE_US)).toEqual([]);
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
      const rearmedUs = now();
      all.key('rearm');
      all.wait(400_000);
      expect(['wren', 'heron', 'stork'].map(all.state)).toEqual(['holding', 'waking', 'waking']);
      expectStill(small, WREN, rearmedUs - 2 * FRAME_US);
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
      const first = [HERON, STORK].map((pin) => trainOf(large, pin, goUs)[0]?.widthUs ?? Number.NaN);
      // The last pulse may have been cut, and the one before it was of an older command: the braked arm stood by then.
      expect(Math.abs((first[0] as number) - (last[0] as number))).toBeLessThan(NEAR_US);
      const olderUs = AGE_US + FRAME_US;
      expect(Math.abs((first[1] as number) - (last[1] as number))).toBeLessThan((SPEED_US_S * olderUs) / 1e6 + NEAR_US);
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
      expectBrakeAndHold(small, WREN, stopUs, [0, 0]);
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
