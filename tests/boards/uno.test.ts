import { describe, expect, it } from 'vitest';
import { ANALOG_MAPPING_QUERY, CAPABILITY_QUERY, position, reportAnalog, servoConfig } from './messages.ts';
import { flashImage } from './hex.ts';
import { pinRecorder } from './pins.ts';
import { BOOT_US, solo } from './solo.ts';

/** 10 bits at 57600 baud (8N1): 173.6 us. */
const BYTE_US = 10e6 / 57_600;

describe('the flash image', () => {
  it('puts bytes where their records say, low byte first in a word', () => {
    // 2 bytes at 0x0010; the sum of 02 00 10 00 0C 94 is B2, and 0x100 - 0xB2 = 0x4E.
    const flash = flashImage(':020010000C944E\r\n:00000001FF\r\n');
    expect(flash[8]).toBe(0x940c);
    expect(flash[9]).toBe(0xffff);
  });

  it('refuses a record whose sum is wrong, a cut record and an unknown record type', () => {
    expect(() => flashImage(':020010000C944F')).toThrow('not an Intel HEX record');
    expect(() => flashImage(':020010000C94')).toThrow('not an Intel HEX record');
    expect(() => flashImage(':020000021000EC')).toThrow('record type 2');
  });
});

describe('the pin recorder', () => {
  it('measures a pulse from edge to edge, and cuts it where the pin lets go', () => {
    const pins = pinRecorder();
    pins.wrote(8, 6, 0b10, 0b10, 100);
    pins.wrote(8, 6, 0b00, 0b10, 1600.5);
    pins.wrote(8, 6, 0b10, 0b10, 20_000);
    pins.letGo(20_300);
    expect(pins.pulses(9)).toEqual([
      { startUs: 100, widthUs: 1500.5 },
      { startUs: 20_000, widthUs: 300 },
    ]);
    expect(pins.level(9)).toBe('open');
  });

  it('sees no level in the pull-up of an input', () => {
    const pins = pinRecorder();
    pins.wrote(0, 8, 0b100, 0, 5);
    expect(pins.level(2)).toBe('open');
    expect(pins.changes(2)).toEqual([]);
  });
});

describe('the emulated board', () => {
  it('gives the same bytes and pulses at the same instants however the clock is stepped', () => {
    const play = (stepUs: number) => {
      const { clock, board, heard, heardAtUs, say } = solo();
      board.setVolts(0, (atUs) => 2.5 + 2 * Math.sin(atUs / 50_000));
      say(reportAnalog(0, true), servoConfig(9), position(9, 1700));
      while (clock.nowUs() < BOOT_US + 300_000) clock.runTo(clock.nowUs() + stepUs);
      return { heard, heardAtUs, pulses: board.pulses(9) };
    };
    const whole = play(300_000);
    expect(whole.pulses.length).toBeGreaterThan(10);
    expect(play(30)).toEqual(whole);
  });

  it('takes a byte no sooner than the line can carry it, and answers no faster', () => {
    const { clock, heard, heardAtUs, say, wait } = solo();
    const before = heard.length;
    const askedUs = clock.nowUs();
    // A version query is one byte (protocol.md "Message Types"); the three bytes of its answer take three byte times.
    say([0xf9], [0xf9]);
    wait(20_000);
    expect(heard.slice(before, before + 6)).toEqual([0xf9, 2, 4, 0xf9, 2, 4]);
    const first = (heardAtUs[before] as number) - askedUs;
    expect(first).toBeGreaterThan(2 * BYTE_US - 10);
    expect(first).toBeLessThan(2 * BYTE_US + 400);

    const from = heard.length;
    say(CAPABILITY_QUERY);
    wait(200_000);
    expect(heard.length - from).toBeGreaterThan(100);
    // The board's divider rounds 57600 baud to 58823 (16 MHz / 16 / 17), so its own bytes take 170 us.
    for (let at = from + 1; at < heard.length; at++) {
      expect((heardAtUs[at] as number) - (heardAtUs[at - 1] as number)).toBeGreaterThanOrEqual(169);
    }
  });

  it('lets go of every pin at a reset, loses what was under way and greets again', () => {
    const { clock, board, heard, say, wait, widthsSince } = solo();
    say(servoConfig(9), position(9, 2000));
    wait(100_000);
    const before = heard.length;
    say(ANALOG_MAPPING_QUERY);
    board.reset();
    const resetUs = clock.nowUs();
    wait(200);
    expect(board.level(9)).toBe('open');
    wait(BOOT_US);
    expect(widthsSince(9, resetUs + 200)).toEqual([]);
    expect(heard.slice(before, before + 3)).toEqual([0xf9, 2, 4]);
  });

  it('is silent and drives nothing without power', () => {
    const { board, heard, say, wait } = solo();
    say(servoConfig(9), position(9, 2000));
    wait(100_000);
    board.powerOff();
    wait(1_000);
    const [bytes, pulses] = [heard.length, board.pulses(9).length];
    say([0xf9]);
    wait(500_000);
    expect(board.powered).toBe(false);
    expect([heard.length, board.pulses(9).length]).toEqual([bytes, pulses]);
    expect(board.level(9)).toBe('open');
  });
});
