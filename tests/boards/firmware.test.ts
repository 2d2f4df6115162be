import { beforeAll, describe, expect, it } from 'vitest';
import {
  ANALOG_MAPPING_QUERY,
  MODE,
  analogReports,
  digitalPin,
  digitalPort,
  pinMode,
  position,
  reportAnalog,
  samplingInterval,
  servoConfig,
} from './messages.ts';
import { median, solo } from './solo.ts';
import type { Solo } from './solo.ts';

describe('StandardFirmata on the emulated board, from its reset', () => {
  it('tells its version and its name within 2.5 s, after 1.8 s of silence', () => {
    const { heard, heardAtUs } = solo(2_500_000);
    // protocol.md "Query Firmware Name and Version": F9 major minor, F0 79 major minor, each character in two 7-bit halves, F7.
    expect(heard.slice(0, 7)).toEqual([0xf9, 2, 4, 0xf0, 0x79, 2, 4]);
    expect(heard.at(-1)).toBe(0xf7);
    const halves = heard.slice(7, -1);
    const name = halves.flatMap((low, at) => (at % 2 === 0 ? [low + ((halves[at + 1] as number) << 7)] : []));
    expect(String.fromCharCode(...name)).toBe('StandardFirmata.ino');
    expect(heardAtUs[0]).toBeGreaterThan(1_800_000);
    expect(heardAtUs[0]).toBeLessThan(1_950_000);
  });

  it('drives every digital pin low as it greets, unasked, so an active-low relay closes at each boot', () => {
    const { board, heardAtUs } = solo();
    // 2..13 are the digital pins that are neither the serial line nor analog inputs (Arduino Uno pinout).
    for (let pin = 2; pin <= 13; pin++) expect(board.level(pin), `pin ${pin}`).toBe('low');
    expect(Math.abs((board.changes(7)[0]?.atUs ?? Number.NaN) - (heardAtUs[0] as number))).toBeLessThan(5_000);
    for (let pin = 14; pin <= 19; pin++) expect(board.level(pin), `pin ${pin}`).toBe('open');
  });

  it('blinks pin 13 at every boot', () => {
    expect(solo().board.pulses(13).length).toBeGreaterThan(3);
  });
});

describe('its analog inputs', () => {
  let it6: Solo;
  const since = (from: number) => analogReports(it6.heard.slice(from));
  beforeAll(() => {
    it6 = solo();
  });

  it('are channels 0 to 5 on pins 14 to 19', () => {
    const from = it6.heard.length;
    it6.say(ANALOG_MAPPING_QUERY);
    it6.wait(50_000);
    // protocol.md "Analog Mapping Query": one byte a pin, the channel or 127 for none.
    const none = Array.from({ length: 14 }, () => 127);
    expect(it6.heard.slice(from)).toEqual([0xf0, 0x6a, ...none, 0, 1, 2, 3, 4, 5, 0xf7]);
  });

  it('report counts that match the voltage, for every channel over the whole span', () => {
    for (let channel = 0; channel < 6; channel++) it6.say(reportAnalog(channel, true));
    for (let step = 0; step < 12; step++) {
      const volts = (channel: number): number => ((step * 6 + channel) * 5) / 71;
      for (let channel = 0; channel < 6; channel++) it6.board.setVolts(channel, volts(channel));
      it6.wait(25_000);
      const from = it6.heard.length;
      it6.wait(25_000);
      const reports = since(from);
      expect(new Set(reports.map((report) => report.channel)).size).toBe(6);
      for (const { channel, counts } of reports) {
        // ATmega328P datasheet, "ADC Conversion Result": ADC = Vin * 1024 / Vref, at most 1023.
        const exact = Math.min((volts(channel) * 1024) / 5, 1023);
        expect(Math.abs(counts - exact), `A${channel} at ${volts(channel)} V`).toBeLessThanOrEqual(1);
      }
    }
  });

  it('follow a moving voltage', () => {
    const from = it6.heard.length;
    const startUs = it6.clock.nowUs();
    // 0 to 5 V in 0.5 s, then still.
    it6.board.setVolts(2, (atUs) => Math.min((atUs - startUs) * 1e-5, 5));
    it6.wait(600_000);
    const counts = since(from)
      .filter((report) => report.channel === 2)
      .map((report) => report.counts)
      .slice(1);
    for (let at = 1; at < counts.length; at++) expect(counts[at]).toBeGreaterThanOrEqual(counts[at - 1] as number);
    expect(counts.at(-1)).toBe(1023);
    expect(new Set(counts).size).toBeGreaterThan(20);
  });

  it('report every 19 ms unless told, and no faster than every 10 ms in this version', () => {
    const reportsPerSecond = (): number => {
      const from = it6.heard.length;
      it6.wait(1_000_000);
      return since(from).filter((report) => report.channel === 0).length;
    };
    // protocol.md "Sampling Interval": default 19 ms, so 1000 / 19 = 52.6 reports a second.
    expect(reportsPerSecond()).toBeGreaterThanOrEqual(52);
    expect(reportsPerSecond()).toBeLessThanOrEqual(53);
    it6.say(samplingInterval(10));
    it6.wait(50_000);
    expect(Math.abs(reportsPerSecond() - 100)).toBeLessThanOrEqual(1);
    // StandardFirmata.ino up to 2.4: MINIMUM_SAMPLING_INTERVAL 10.
    it6.say(samplingInterval(2));
    it6.wait(50_000);
    expect(Math.abs(reportsPerSecond() - 100)).toBeLessThanOrEqual(1);
  });
});

describe('its servo pulses', () => {
  let running: Solo;
  beforeAll(() => {
    running = solo();
    running.say(servoConfig(9), position(9, 1500));
    running.wait(100_000);
  });

  /** Widths of the pulses of about a second, once the new position has surely taken. */
  const widthsAt = (value: number, pulses = 50): number[] => {
    running.say(position(9, value));
    running.wait(50_000);
    const sinceUs = running.clock.nowUs();
    running.wait((pulses + 1) * 20_100);
    return running.widthsSince(9, sinceUs).slice(0, pulses);
  };

  it('are as wide as asked: the median of 50 within 1 us, each within 10', () => {
    for (const asked of [544, 1000, 1500, 1501, 1777, 2400]) {
      const widths = widthsAt(asked);
      expect(widths.length).toBe(50);
      expect(Math.abs(median(widths) - asked), `${asked} us`).toBeLessThanOrEqual(1);
      for (const width of widths) expect(Math.abs(width - asked), `${asked} us`).toBeLessThanOrEqual(10);
    }
  });

  it('stay so while six channels stream and four servos are commanded 50 times a second', () => {
    const busy = solo();
    const pins = [3, 5, 6, 9];
    busy.say(...pins.flatMap((pin) => [servoConfig(pin), position(pin, 1500)]), samplingInterval(10));
    for (let channel = 0; channel < 6; channel++) busy.say(reportAnalog(channel, true));
    busy.wait(200_000);
    const sinceUs = busy.clock.nowUs();
    // 20.039 ms drifts against the board's own frame, so commands meet every phase of it.
    for (let command = 0; command < 100; command++) {
      busy.say(...pins.map((pin) => position(pin, 1500)));
      busy.wait(20_039);
    }
    for (const pin of pins) {
      const widths = busy.widthsSince(pin, sinceUs);
      expect(widths.length).toBeGreaterThan(95);
      expect(Math.abs(median(widths) - 1500)).toBeLessThanOrEqual(1);
      for (const width of widths) expect(Math.abs(width - 1500)).toBeLessThanOrEqual(10);
    }
  });

  it('come every 20 ms', () => {
    const starts = running.board
      .pulses(9)
      .slice(-50)
      .map((pulse) => pulse.startUs);
    const gaps = starts.slice(1).map((start, at) => start - (starts[at] as number));
    // arduino-libraries/Servo, Servo.h: REFRESH_INTERVAL 20000 us.
    expect(Math.abs(median(gaps) - 20_000)).toBeLessThanOrEqual(10);
  });

  it('come more slowly when the twelve slots of a frame add up to more than 20 ms', () => {
    const wide = solo();
    const pins = [2, 3, 4, 5];
    wide.say(...pins.flatMap((pin) => [servoConfig(pin, 544, 2440), position(pin, 2440)]));
    wide.wait(500_000);
    const starts = wide.board.pulses(2).map((pulse) => pulse.startUs);
    // Servo.cpp gives every slot its time, used or not: 4 * 2440 + 8 * 1500 = 21760 us, and the switching between them.
    const gap = (starts.at(-1) as number) - (starts.at(-2) as number);
    expect(gap).toBeGreaterThan(21_760);
    expect(gap).toBeLessThan(21_960);
  });

  it('take a value under 544 as degrees: 543 is the far end', () => {
    // Servo.cpp write(): values below MIN_PULSE_WIDTH (544) are degrees, at most 180, laid over 544..2400 us.
    for (const [value, us] of [
      [0, 544],
      [90, 1472],
      [180, 2400],
      [200, 2400],
      [500, 2400],
      [543, 2400],
      [544, 544],
      [545, 545],
    ] as const) {
      expect(Math.abs(median(widthsAt(value, 5)) - us), `value ${value}`).toBeLessThanOrEqual(2);
    }
  });

  it('keep to the limits of their configuration only while those fit the library', () => {
    // Servo.cpp attach(): limits are kept as int8 of (544 - min) / 4 and (2400 - max) / 4, unchecked.
    for (const [minUs, maxUs, asked, us] of [
      // (544 - 1000) / 4 = -114 and (2400 - 2000) / 4 = 100 fit: clamped.
      [1000, 2000, 600, 1000],
      [1000, 2000, 2300, 2000],
      // (544 - 1056) / 4 = -128 still fits; 1060 gives -129, which wraps to 127: a lower limit of 544 - 508 = 36 us.
      [1056, 2400, 600, 1056],
      [1060, 2400, 600, 600],
      // (2400 - 1800) / 4 = 150 wraps to -106: an upper limit of 2400 + 424 = 2824 us.
      [1000, 1800, 2400, 2400],
    ] as const) {
      running.say(servoConfig(9, minUs, maxUs), position(9, asked));
      running.wait(50_000);
      const sinceUs = running.clock.nowUs();
      running.wait(100_000);
      const width = median(running.widthsSince(9, sinceUs));
      expect(Math.abs(width - us), `${asked} us within ${minUs}..${maxUs}`).toBeLessThanOrEqual(2);
    }
  });
});

describe('its digital outputs', () => {
  it('follow a digital port message and, in this version, no set-pin message', () => {
    const { board, say, wait } = solo();
    say(pinMode(7, MODE.output), digitalPort(0, 0x80));
    wait(20_000);
    expect(board.level(7)).toBe('high');
    expect(board.level(6)).toBe('low');
    say(digitalPort(0, 0x00));
    wait(20_000);
    expect(board.level(7)).toBe('low');
    // F5 came with protocol 2.5 (protocol.md, "Set digital pin value"); this build says 2.4.
    say(digitalPin(7, true));
    wait(20_000);
    expect(board.level(7)).toBe('low');
  });

  it('leave a servo on the same port its pulses', () => {
    const { clock, say, wait, widthsSince } = solo();
    say(servoConfig(6), position(6, 1700), pinMode(7, MODE.output));
    wait(100_000);
    const sinceUs = clock.nowUs();
    for (let turn = 0; turn < 20; turn++) {
      say(digitalPort(0, turn % 2 === 0 ? 0x80 : 0));
      wait(7_000);
    }
    const widths = widthsSince(6, sinceUs);
    expect(widths.length).toBeGreaterThanOrEqual(6);
    for (const width of widths) expect(Math.abs(width - 1700)).toBeLessThanOrEqual(10);
  });
});
