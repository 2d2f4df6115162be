import { describe, expect, it } from 'vitest';
import { servoSlots } from '../../src/sim/servo-slots.ts';

/** Values below: arduino-libraries/Servo, src/Servo.h and src/avr/Servo.cpp; firmata/arduino, StandardFirmata.ino 2.5. */
function slots() {
  const pulses = new Map<number, number>();
  return { slots: servoSlots((pin, pulseUs) => pulses.set(pin, pulseUs)), pulses };
}

describe('slots of the servo library', () => {
  it('pulse 1500 us from attaching on, until told otherwise', () => {
    const { slots: tested, pulses } = slots();
    tested.attach(9, 544, 2400);
    expect(pulses.get(9)).toBe(1500);
    expect(tested.attached(9)).toBe(true);
  });

  it('take 544 and more for microseconds and less for degrees', () => {
    const { slots: tested, pulses } = slots();
    tested.attach(9, 544, 2400);
    // Servo.cpp: write() maps 0..180 to min..max in whole numbers: 544 + trunc(90 * 1856 / 180) = 1472, not 1500.
    for (const [value, pulseUs] of [
      [1000, 1000],
      [544, 544],
      [0, 544],
      [45, 1008],
      [90, 1472],
      [135, 1936],
      [180, 2400],
      [500, 2400],
      [3000, 2400],
    ] as const) {
      tested.write(9, value);
      expect(pulses.get(9), `write(${value})`).toBe(pulseUs);
    }
  });

  it('keep limits in steps of 4 us in a signed byte, where too large ones wrap', () => {
    const { slots: tested, pulses } = slots();
    // (544 - 602) / 4 = -14.5, kept as -14: 544 + 56 = 600.
    tested.attach(9, 602, 2400);
    tested.write(9, 590);
    expect(pulses.get(9)).toBe(600);
    tested.detach(9);
    // (544 - 1100) / 4 = -139 wraps to 117: 544 - 468 = 76, so the limit of 1100 us is none.
    tested.attach(9, 1100, 2400);
    tested.write(9, 600);
    expect(pulses.get(9)).toBe(600);
  });

  it('revive the pulse of the slot freed last on whichever pin is attached next', () => {
    const { slots: tested, pulses } = slots();
    for (const [pin, pulseUs] of [
      [5, 700],
      [6, 2300],
    ] as const) {
      tested.attach(pin, 544, 2400);
      tested.write(pin, pulseUs);
    }
    tested.detach(5);
    tested.detach(6);
    expect(pulses.get(5)).toBeNaN();
    tested.attach(5, 544, 2400);
    expect(pulses.get(5)).toBe(2300);
    tested.detach(5);
    // In the reverse order of detaching each pin gets its own slot back.
    tested.attach(5, 544, 2400);
    tested.attach(6, 544, 2400);
    expect(pulses.get(6)).toBe(700);
  });

  it('are 48, as on a Mega', () => {
    const { slots: tested } = slots();
    for (let pin = 2; pin < 50; pin++) expect(tested.attach(pin, 544, 2400)).toBe(true);
    expect(tested.attach(50, 544, 2400)).toBe(false);
    tested.detach(2);
    expect(tested.attach(50, 544, 2400)).toBe(true);
  });

  it('ignore what is written to a pin that is not attached', () => {
    const { slots: tested, pulses } = slots();
    tested.write(9, 1500);
    expect(pulses.has(9)).toBe(false);
  });
});
