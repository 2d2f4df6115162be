/**
 * How StandardFirmata shares out the servo library's timers' slots (firmata/arduino, StandardFirmata.ino 2.5,
 * attachServo and detachServo): a slot freed last is given away first, and a slot remembers its last pulse. So a pin
 * that is attached again can revive the pulse of another one. Servos on such a board have that habit too.
 */
export interface ServoSlots {
  /** Gives the pin a slot and sends that slot's pulse: 1500 us if it is new. False when none is left. */
  attach(pin: number, minUs: number, maxUs: number): boolean;
  detach(pin: number): void;
  attached(pin: number): boolean;
  /** Writes a value to an attached pin, as the library's `write` understands it. */
  write(pin: number, value: number): void;
}

/** The servo library's constants: Servo.h, MIN_PULSE_WIDTH, MAX_PULSE_WIDTH, DEFAULT_PULSE_WIDTH; 48 servos on a Mega. */
export const MIN_PULSE_US = 544;
export const MAX_PULSE_US = 2400;
const DEFAULT_PULSE_US = 1500;
const SLOTS = 48;

interface Slot {
  pulseUs: number;
  minUs: number;
  maxUs: number;
}

/** @param output called when a pin's pulse changes; NaN when it ends. */
export function servoSlots(output: (pin: number, pulseUs: number) => void): ServoSlots {
  const slots = new Map<number, Slot>();
  const freed: Slot[] = [];
  let used = 0;

  return {
    attach(pin, minUs, maxUs) {
      if (slots.has(pin)) return true;
      if (freed.length === 0 && used === SLOTS) return false;
      if (freed.length === 0) used++;
      const slot = freed.pop() ?? { pulseUs: DEFAULT_PULSE_US, minUs: MIN_PULSE_US, maxUs: MAX_PULSE_US };
      slot.minUs = MIN_PULSE_US - keptLimit(MIN_PULSE_US - minUs);
      slot.maxUs = MAX_PULSE_US - keptLimit(MAX_PULSE_US - maxUs);
      slots.set(pin, slot);
      output(pin, slot.pulseUs);
      return true;
    },
    detach(pin) {
      const slot = slots.get(pin);
      if (slot === undefined) return;
      slots.delete(pin);
      freed.push(slot);
      output(pin, Number.NaN);
    },
    attached: (pin) => slots.has(pin),
    write(pin, value) {
      const slot = slots.get(pin);
      if (slot === undefined) return;
      const wishUs = value < MIN_PULSE_US ? degreesToUs(Math.min(value, 180), slot) : value;
      slot.pulseUs = Math.min(slot.maxUs, Math.max(slot.minUs, wishUs));
      output(pin, slot.pulseUs);
    },
  };
}

/** The AVR library keeps a limit in one signed byte, in steps of 4 us, and what does not fit wraps (Servo.cpp, attach). */
function keptLimit(fromDefaultUs: number): number {
  return ((Math.trunc(fromDefaultUs / 4) << 24) >> 24) * 4;
}

/** Arduino's `map` in whole numbers. */
function degreesToUs(degrees: number, slot: Slot): number {
  return Math.trunc((degrees * (slot.maxUs - slot.minUs)) / 180) + slot.minUs;
}
