import { US_PER_MS } from '../clock/clock.ts';
import {
  ANALOG,
  ANALOG_MAPPING,
  ANALOG_MAPPING_QUERY,
  DIGITAL,
  EXTENDED_ANALOG,
  FIRMWARE,
  MODE_ANALOG,
  MODE_OUTPUT,
  NO_CHANNEL,
  PIN_MODE,
  PIN_STATE,
  PIN_STATE_QUERY,
  REPORT_ANALOG,
  SAMPLING_INTERVAL,
  SERVO_CONFIG,
  SYSEX,
  SYSEX_END,
  VERSION,
} from '../wire/firmata-messages.ts';
import type { BoardPlan } from '../wire/types.ts';
import { firmataParser } from './firmata-parser.ts';
import type { Firmware, Pins } from './firmware.ts';
import { MAX_PULSE_US, MIN_PULSE_US, servoSlots } from './servo-slots.ts';

/**
 * A board with the pins of an Arduino Mega that behaves as StandardFirmata does (firmata/arduino 2.5,
 * StandardFirmata.ino), in what the bridge uses of it. A lost first position leaves a servo at its slot's last pulse,
 * or at 1500 us, as it would on a real board.
 */
const DIGITAL_PINS = 54;
const ANALOG_INPUTS = 16;
const PINS = DIGITAL_PINS + ANALOG_INPUTS;
/** The first two pins are the serial port. */
const FIRST_FREE_PIN = 2;
const SAMPLING_MS = 19;
const PROTOCOL = [2, 5] as const;
const MODE_SERVO = 0x04;

type PinUse =
  | { readonly kind: 'servo'; readonly output: number; readonly servo: number }
  | { readonly kind: 'power'; readonly output: number; readonly onLevel: number };

export function firmataBoard(name: string, plan: BoardPlan, pins: Pins): Firmware {
  const uses = pinUses(plan);
  const inputs = plan.inputs?.channels ?? [];
  const modes = new Uint8Array(PINS);
  /** What was written to each pin last. */
  const states = new Uint16Array(PINS);
  const reporting = new Uint8Array(ANALOG_INPUTS);
  let samplingUs = SAMPLING_MS * US_PER_MS;

  const slots = servoSlots((pin, pulseUs) => {
    const use = uses.get(pin);
    if (use?.kind === 'servo') pins.pulse(use.output, use.servo, pulseUs);
  });

  const say = (...bytes: readonly number[]): void => pins.send(Uint8Array.from(bytes));

  const sayVersion = (): void => say(VERSION, ...PROTOCOL);

  const sayFirmware = (): void =>
    say(SYSEX, FIRMWARE, ...PROTOCOL, ...[...new TextEncoder().encode(name)].flatMap(sevenBits), SYSEX_END);

  const sayMapping = (): void => {
    const channels = Array.from(modes, (_, pin) => (pin < DIGITAL_PINS ? NO_CHANNEL : pin - DIGITAL_PINS));
    say(SYSEX, ANALOG_MAPPING, ...channels, SYSEX_END);
  };

  const sayPinState = (pin: number): void => {
    if (pin < PINS) say(SYSEX, PIN_STATE, pin, modes[pin] as number, ...sevenBits(states[pin] as number), SYSEX_END);
  };

  const setLevel = (pin: number, level: number): void => {
    states[pin] = level;
    const use = uses.get(pin);
    // A pin that does not drive lets its relay fall.
    if (use?.kind === 'power') pins.power(use.output, modes[pin] === MODE_OUTPUT && level === use.onLevel);
  };

  const setMode = (pin: number, mode: number): void => {
    if (pin >= PINS) return;
    if (mode !== MODE_SERVO) slots.detach(pin);
    if (pin >= DIGITAL_PINS) report(pin - DIGITAL_PINS, mode === MODE_ANALOG);
    modes[pin] = mode;
    if (mode === MODE_SERVO && pin >= FIRST_FREE_PIN) slots.attach(pin, MIN_PULSE_US, MAX_PULSE_US);
    setLevel(pin, 0);
  };

  const configureServo = (pin: number, minUs: number, maxUs: number): void => {
    if (pin < FIRST_FREE_PIN || pin >= PINS) return;
    slots.detach(pin);
    slots.attach(pin, minUs, maxUs);
    setMode(pin, MODE_SERVO);
  };

  const report = (channel: number, on: boolean): void => {
    if (channel >= ANALOG_INPUTS) return;
    reporting[channel] = on ? 1 : 0;
    if (on) sayAnalog(channel, pins.read());
  };

  const sayAnalog = (channel: number, counts: Float64Array): void => {
    const input = inputs.indexOf(channel);
    say(ANALOG | channel, ...sevenBits(input < 0 ? 0 : (counts[input] as number)));
  };

  const writeAnalog = (pin: number, value: number): void => {
    if (pin >= PINS || pins.loses() || modes[pin] !== MODE_SERVO) return;
    states[pin] = value;
    slots.write(pin, value);
  };

  const writePort = (port: number, bits: number): void => {
    for (let bit = 0; bit < 8; bit++) {
      const pin = port * 8 + bit;
      if (modes[pin] === MODE_OUTPUT) setLevel(pin, (bits >> bit) & 1);
    }
  };

  return {
    start() {
      // It drives every digital pin low as it starts: a relay that is on when low switches on, unasked.
      for (let pin = 0; pin < DIGITAL_PINS; pin++) setMode(pin, MODE_OUTPUT);
      modes.fill(MODE_ANALOG, DIGITAL_PINS);
      sayVersion();
      sayFirmware();
    },
    receive: firmataParser({
      single(command) {
        if (command === VERSION) sayVersion();
      },
      message(command, first, second) {
        const channel = command & 0x0f;
        if (command === PIN_MODE) setMode(first, second);
        else if ((command & 0xf0) === ANALOG) writeAnalog(channel, joined(first, second));
        else if ((command & 0xf0) === REPORT_ANALOG) report(channel, first !== 0);
        else if ((command & 0xf0) === DIGITAL) writePort(channel, joined(first, second));
      },
      sysex([feature, pin = PINS, a = 0, b = 0, c = 0, d = 0]) {
        if (feature === FIRMWARE) sayFirmware();
        else if (feature === ANALOG_MAPPING_QUERY) sayMapping();
        else if (feature === PIN_STATE_QUERY) sayPinState(pin);
        else if (feature === EXTENDED_ANALOG) writeAnalog(pin, joined(a, b));
        else if (feature === SERVO_CONFIG) configureServo(pin, joined(a, b), joined(c, d));
        else if (feature === SAMPLING_INTERVAL) samplingUs = Math.max(1, joined(pin, a)) * US_PER_MS;
      },
    }),
    sample() {
      const counts = pins.read();
      for (let channel = 0; channel < ANALOG_INPUTS; channel++) {
        if (reporting[channel] === 1 && !pins.loses()) sayAnalog(channel, counts);
      }
    },
    get samplingUs() {
      return samplingUs;
    },
  };
}

function pinUses(plan: BoardPlan): Map<number, PinUse> {
  const uses = new Map<number, PinUse>();
  plan.outputs.forEach(({ servos, power }, output) => {
    servos.forEach(({ channel }, servo) => uses.set(channel, { kind: 'servo', output, servo }));
    if (power !== null) uses.set(power.channel, { kind: 'power', output, onLevel: power.on === 'high' ? 1 : 0 });
  });
  return uses;
}

function sevenBits(value: number): [number, number] {
  return [value & 0x7f, (value >> 7) & 0x7f];
}

function joined(low: number, high: number): number {
  return low + (high << 7);
}
