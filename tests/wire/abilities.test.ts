import { describe, expect, it } from 'vitest';
import { frameBytes, WIRE_ABILITIES } from '../../src/wire/abilities.ts';
import { LINES, PLAN, WREN } from './boards.ts';

describe('frameBytes', () => {
  it('counts the longest line a template can make', () => {
    // "2440,2400,2000.00\n"
    expect(frameBytes(LINES, PLAN, 0)).toBe(18);
  });

  it('is nothing without a template, or with a mistaken one', () => {
    for (const template of [null, '{nose.us}\n']) {
      expect(frameBytes({ ...LINES, lines: { ...LINES.lines, template } }, PLAN, 0)).toBe(0);
    }
  });

  it('counts the template of the output itself, where it has one', () => {
    const lines = { template: '{shoulder.us}{elbow.us}{twist.us}', limp: null, powerOn: null, powerOff: null };
    expect(frameBytes(LINES, { ...PLAN, outputs: [{ ...WREN, lines }] }, 0)).toBe(12);
  });

  it('counts a frame: type, number, three bytes a servo, CRC, stuffing and zero', () => {
    expect(frameBytes({ name: 'frames' }, PLAN, 0)).toBe(2 + 3 * 3 + 2 + 1 + 1);
  });

  it('counts three bytes for a Firmata pin up to 15 and six above, and no configuration', () => {
    expect(frameBytes({ name: 'firmata' }, PLAN, 0)).toBe(3 + 3 + 6);
  });
});

describe('WIRE_ABILITIES', () => {
  it('keeps Firmata pulses out of what the Servo library takes for degrees', () => {
    // arduino-libraries/Servo, src/Servo.h: MIN_PULSE_WIDTH 544; Servo.cpp, write(): smaller values are degrees.
    expect(WIRE_ABILITIES.firmata.pulseMinUs).toBe(544);
  });

  it('keeps Firmata limits within what the Servo library holds in eight bits', () => {
    // arduino-libraries/Servo, src/avr/Servo.cpp: max is kept as (2400 - max) / 4 in an int8.
    expect((2_400 - WIRE_ABILITIES.firmata.pulseMaxUs) / 4).toBe(-128);
  });

  it('speaks to StandardFirmata at its own speed', () => {
    // firmata/arduino, StandardFirmata.ino: Firmata.begin(57600).
    expect(WIRE_ABILITIES.firmata.baudDefault).toBe(57_600);
  });

  it('lets frames carry every pulse that its sixteen bits hold, in whole microseconds', () => {
    expect(WIRE_ABILITIES.frames.pulseMaxUs).toBe(Math.floor(0xffff * WIRE_ABILITIES.frames.stepUs));
  });
});
