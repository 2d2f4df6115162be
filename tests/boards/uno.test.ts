import { describe, expect, it } from 'vitest';
import { virtualClock } from '../../src/clock/virtual.ts';
import { ANALOG_MAPPING_QUERY, CAPABILITY_QUERY, position, reportAnalog, servoConfig } from './messages.ts';
import { flashImage } from './hex.ts';
import { pinRecorder } from './pins.ts';
import { BOOT_US, solo } from './solo.ts';
import { unoBoard } from './uno.ts';
import { wiredBoard } from './wired.ts';

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

  it('keeps a received byte while the firmware starts to send', () => {
    const clock = virtualClock();
    const sent: number[] = [];
    // Opcodes by hand from the AVR instruction set manual; register addresses from the ATmega328P datasheet.
    const program = [
      [0xe130, 0x9330, 0x00c4], // ldi r19,16; sts UBRR0L,r19: 58823 baud
      [0xe108, 0x9300, 0x00c1], // ldi r16,RXEN|TXEN; sts UCSR0B,r16
      [0x9110, 0x00c0, 0xff17, 0xcffc], // wait: lds r17,UCSR0A; sbrs r17,RXC; rjmp wait
      [0x9300, 0x00c1], // sts UCSR0B,r16, with the byte still unread
      [0x9110, 0x00c0, 0xff17, 0xcffc], // again: lds r17,UCSR0A; sbrs r17,RXC; rjmp again
      [0x9120, 0x00c6, 0x9320, 0x00c6, 0xcfff], // lds r18,UDR0; sts UDR0,r18; end: rjmp end
    ];
    const flash = Uint16Array.from(program.flat());
    const board = unoBoard({ clock, flash, send: ([byte = -1]) => sent.push(byte) });
    board.reset();
    clock.runTo(1_000);
    board.receive(Uint8Array.of(0x5a));
    clock.runTo(2_000);
    expect(sent).toEqual([0x5a]);
  });

  it('lets go of every pin at a reset, loses what was under way and greets again', () => {
    const { clock, board, heard, say, wait, widthsSince } = solo();
    say(servoConfig(9), position(9, 2000));
    wait(100_000);
    const before = heard.length;
    say(ANALOG_MAPPING_QUERY);
    board.reset();
    const resetUs = clock.nowUs();
    expect(board.level(9)).toBe('open');
    wait(BOOT_US);
    expect(widthsSince(9, resetUs)).toEqual([]);
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

describe('a board behind a port', () => {
  it('starts when the port opens, takes what is written and is off while its cable is out', () => {
    const clock = virtualClock();
    const { port, board, unplug, replug } = wiredBoard(clock, 'serial:uno');
    const heard: string[] = [];
    port.start({
      opened: () => heard.push('opened'),
      data: (bytes) => heard.push(...Array.from(bytes, (byte) => byte.toString(16))),
      idle: () => heard.push('idle'),
      closed: ({ code }) => heard.push(code),
    });
    expect(board.powered).toBe(false);
    clock.runTo(BOOT_US);
    expect(heard.slice(0, 4)).toEqual(['opened', 'f9', '2', '4']);

    expect(port.write(Uint8Array.from([servoConfig(9), position(9, 1700)].flat()))).toBe(true);
    clock.runTo(BOOT_US + 100_000);
    expect(heard.at(-1)).toBe('idle');
    expect(board.pulses(9).length).toBeGreaterThan(1);

    heard.length = 0;
    unplug();
    clock.runTo(clock.nowUs() + 1_000_000);
    expect(heard[0]).toBe('PORT_CLOSED');
    expect(heard.slice(1).every((what) => what === 'PORT_MISSING')).toBe(true);
    expect([board.powered, board.level(9)]).toEqual([false, 'open']);

    heard.length = 0;
    replug();
    clock.runTo(clock.nowUs() + 1_000_000 + BOOT_US);
    expect(heard.slice(heard.indexOf('opened'), heard.indexOf('opened') + 4)).toEqual(['opened', 'f9', '2', '4']);
  });
});
