/**
 * What a servo gets first when its board starts to pulse it, and last when the pulses end. A hobby servo runs to its
 * first pulse at full speed, so a wrong one is a blow. Judged from the pins, over the phases of the board's 20 ms frame.
 */
import { beforeAll, describe, expect, it } from 'vitest';
import { MODE, pinMode, position, servoConfig } from './messages.ts';
import { solo } from './solo.ts';
import type { Solo } from './solo.ts';

const FRAME_US = 20_000;
/** A pulse further off than this was not asked for. */
const NEAR_US = 15;
const near = (widthUs: number, askedUs: number): boolean => Math.abs(widthUs - askedUs) <= NEAR_US;

/** Pin 13 carries the LED, which the firmware itself blinks at each boot: whatever hangs there is pulsed anyway. */
const SPARE = 13;

/** The servo library keeps a position by slot, and the firmware hands the slot freed last to the next pin: the position is put into the slot on the spare pin first. */
const primed = (pin: number, us: number): number[][] => [
  servoConfig(SPARE),
  position(SPARE, us),
  pinMode(SPARE, MODE.output),
  servoConfig(pin),
  position(pin, us),
];

/** Runs to `phaseUs` after the start of one of the next pulses on `pin`. */
function toPhase(at: Solo, pin: number, phaseUs: number): void {
  const startUs = at.board.pulses(pin).at(-1)?.startUs ?? Number.NaN;
  at.clock.runTo(Math.ceil(startUs + FRAME_US + phaseUs));
}

/** Every `stepUs` of a frame. */
const phases = (stepUs: number): number[] => Array.from({ length: FRAME_US / stepUs }, (_, step) => step * stepUs);

/** The first two pulses on pin 9 when `messages` go out at each phase of the frame of a board that pulses pin 3 already. */
function firstPulses(messages: readonly (readonly number[])[], atPhasesUs: readonly number[]): Pair[] {
  const at = solo();
  at.say(servoConfig(3), position(3, 1200));
  at.wait(60_000);
  return atPhasesUs.map((phaseUs) => {
    // The slot that pin 9 will get holds 1500 us, as in a fresh board; saying so takes 17 bytes, or 3 ms.
    at.say(pinMode(9, MODE.output), servoConfig(9), position(9, 1500), pinMode(9, MODE.output));
    at.wait(3_500);
    toPhase(at, 3, phaseUs);
    const sinceUs = at.clock.nowUs();
    at.say(...messages);
    at.wait(2 * FRAME_US + 10_000);
    const [first = Number.NaN, second = Number.NaN] = at.widthsSince(9, sinceUs);
    return { phaseUs, first, second };
  });
}

interface Pair {
  readonly phaseUs: number;
  readonly first: number;
  readonly second: number;
}

describe('the first pulse of a servo', () => {
  const oneWrite = [servoConfig(9), position(9, 2000)];
  let wrong: readonly Pair[];
  beforeAll(() => {
    wrong = firstPulses(oneWrite, phases(250)).filter(({ first }) => !near(first, 2000));
  });

  it('can be 1500 us whatever was asked, when configuration and position go out in one write beside a running servo', () => {
    // The three bytes of the position take 3 * 173.6 us to follow the configuration: a window of 521 us or a little more
    // in each 20,000 us frame, so 80 phases hit it twice or three times.
    expect(wrong.length).toBeGreaterThanOrEqual(2);
    expect(wrong.length).toBeLessThanOrEqual(3);
    for (const { first, second } of wrong) expect([near(first, 1500), near(second, 2000)]).toEqual([true, true]);
  });

  it('is not mended by limits that both equal the wanted pulse, nor by a position before the configuration', () => {
    const atPhasesUs = wrong.map(({ phaseUs }) => phaseUs);
    const pinched = firstPulses([servoConfig(9, 2000, 2000), position(9, 2000)], atPhasesUs);
    for (const { first } of pinched) expect(near(first, 1500)).toBe(true);
    const early = firstPulses([position(9, 2000), servoConfig(9)], phases(5_000));
    for (const { first, second } of early) expect([near(first, 1500), near(second, 1500)]).toEqual([true, true]);
  });

  it('is right at every phase when the slot was primed on the spare pin', () => {
    const pairs = firstPulses(primed(9, 2000), phases(200));
    expect(pairs.length).toBe(100);
    for (const { first, second } of pairs) expect([near(first, 2000), near(second, 2000)]).toEqual([true, true]);
  });

  it('is right for each of three servos woken one after another, and the spare pin is low again', () => {
    const at = solo();
    const wake = new Map([
      [3, 700],
      [9, 1400],
      [10, 2300],
    ]);
    const sinceUs = at.clock.nowUs();
    for (const [pin, us] of wake) {
      at.say(...primed(pin, us));
      at.wait(100_000);
    }
    for (const [pin, us] of wake) {
      const widths = at.widthsSince(pin, sinceUs);
      expect(widths.length).toBeGreaterThan(2);
      for (const width of widths) expect(near(width, us), `pin ${pin}: ${width}`).toBe(true);
    }
    expect(at.board.level(SPARE)).toBe('low');
  });

  it('is right for every servo of a board that has pulsed none since its boot, in one write', () => {
    const at = solo();
    const pins = [2, 3, 4, 5, 6, 7, 8, 9, 10, 11, 12];
    const askedUs = (pin: number): number => 700 + 100 * pin;
    const saidUs = at.clock.nowUs();
    at.say(...pins.flatMap((pin) => [servoConfig(pin), position(pin, askedUs(pin))]));
    at.wait(200_000);
    for (const pin of pins) {
      const widths = at.widthsSince(pin, saidUs);
      expect(widths.length).toBeGreaterThan(2);
      for (const width of widths) expect(near(width, askedUs(pin)), `pin ${pin}: ${width}`).toBe(true);
    }
    // The first match of the timer comes only when its 16 bits are through: 65536 * 8 / 16 MHz = 32768 us.
    const first = Math.min(...pins.map((pin) => at.board.pulses(pin)[0]?.startUs ?? Number.NaN)) - saidUs;
    expect(first).toBeGreaterThan(32_768);
  });
});

describe('a servo attached again', () => {
  const revived = (order: readonly number[]): Map<number, number> => {
    const at = solo();
    at.say(servoConfig(9), position(9, 1000), servoConfig(10), position(10, 2000));
    at.wait(100_000);
    at.say(pinMode(9, MODE.output), pinMode(10, MODE.output));
    at.wait(100_000);
    const sinceUs = at.clock.nowUs();
    at.say(...order.map((pin) => servoConfig(pin)));
    at.wait(100_000);
    return new Map(order.map((pin) => [pin, at.widthsSince(pin, sinceUs)[0] ?? Number.NaN]));
  };

  it('gets the other pin’s last pulse in the order of detaching', () => {
    const first = revived([9, 10]);
    expect(near(first.get(9) as number, 2000)).toBe(true);
    expect(near(first.get(10) as number, 1000)).toBe(true);
  });

  it('gets its own last pulse in the reverse order', () => {
    const first = revived([10, 9]);
    expect(near(first.get(9) as number, 1000)).toBe(true);
    expect(near(first.get(10) as number, 2000)).toBe(true);
  });

  it('gets the pulse it is primed with in any order', () => {
    const at = solo();
    at.say(servoConfig(9), position(9, 1000), servoConfig(10), position(10, 2000));
    at.wait(100_000);
    at.say(pinMode(9, MODE.output), pinMode(10, MODE.output));
    at.wait(100_000);
    const sinceUs = at.clock.nowUs();
    at.say(...primed(9, 1100));
    at.wait(100_000);
    at.say(...primed(10, 1900));
    at.wait(100_000);
    for (const width of at.widthsSince(9, sinceUs)) expect(near(width, 1100)).toBe(true);
    for (const width of at.widthsSince(10, sinceUs)) expect(near(width, 1900)).toBe(true);
  });
});

describe('the last pulse of a servo', () => {
  it('is cut short when the pulses are ended in the middle of it', () => {
    const at = solo();
    at.say(servoConfig(9), position(9, 2000));
    at.wait(100_000);
    const last: number[] = [];
    for (let phaseUs = 0; phaseUs < FRAME_US; phaseUs += 400) {
      toPhase(at, 9, phaseUs);
      at.say(pinMode(9, MODE.output));
      at.wait(FRAME_US);
      last.push(at.board.pulses(9).at(-1)?.widthUs ?? Number.NaN);
      expect(at.board.level(9)).toBe('low');
      at.say(servoConfig(9), position(9, 2000));
      at.wait(3 * FRAME_US);
    }
    const cut = last.filter((width) => !near(width, 2000));
    // A 2000 us pulse fills a tenth of the frame: 5 of 50 phases.
    expect(cut.length).toBeGreaterThanOrEqual(4);
    expect(cut.length).toBeLessThanOrEqual(6);
    for (const width of cut) expect(width).toBeLessThan(2000);
  });
});
