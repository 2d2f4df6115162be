import { US_PER_MS } from '../clock/clock.ts';
import type { BoardPlan } from '../wire/types.ts';
import { firmataParser, SYSEX_END, SYSEX_START } from './firmata-parser.ts';
import type { Firmware, Pins } from './firmware.ts';
import { MAX_PULSE_US, MIN_PULSE_US, servoSlots } from './servo-slots.ts';

/**
 * The board's side of Firmata as StandardFirmata speaks it (protocol 2.8, protocol.md and servos.md; behaviour of
 * firmata/arduino 2.5, StandardFirmata.ino), on a board with the pins of an Arduino Mega. What the bridge never asks
 * for (capabilities, pin states, digital reports, I2C) is not answered.
 */
const DIGITAL_PINS = 54;
const ANALOG_INPUTS = 16;
const PINS = DIGITAL_PINS + ANALOG_INPUTS;
/** The first two pins are the serial port. */
const FIRST_FREE_PIN = 2;

const MODE_INPUT = 0;
const MODE_OUTPUT = 1;
const MODE_ANALOG = 2;
const MODE_SERVO = 4;

const VERSION = 0xf9;
const RESET = 0xff;

const NOT_ANALOG = 127;
const SAMPLING_MS = 19;
const PROTOCOL = [2, 5] as const;

interface PinUse {
  readonly output: number;
  /** Index of the servo; -1 where the pin switches the output's power. */
  readonly servo: number;
  readonly powerOn: boolean;
}

export function firmataBoard(name: string, plan: BoardPlan, pins: Pins): Firmware {
  const uses = pinUses(plan);
  const inputs = plan.inputs?.channels ?? [];
  const modes = new Uint8Array(PINS);
  const levels = new Uint8Array(PINS);
  const reporting = new Uint8Array(ANALOG_INPUTS);
  let samplingUs = SAMPLING_MS * US_PER_MS;

  const slots = servoSlots((pin, pulseUs) => {
    const use = uses.get(pin);
    if (use !== undefined && use.servo >= 0) pins.pulse(use.output, use.servo, pulseUs);
  });

  /** A power pin switches while it drives; as an input it lets go, and the relay falls. */
  const setLevel = (pin: number, level: number): void => {
    levels[pin] = level;
    const use = uses.get(pin);
    if (use !== undefined && use.servo < 0)
      pins.power(use.output, modes[pin] === MODE_OUTPUT && (level === 1) === use.powerOn);
  };

  const setMode = (pin: number, mode: number): void => {
    if (pin >= PINS) return;
    if (mode !== MODE_SERVO) slots.detach(pin);
    if (pin >= DIGITAL_PINS) reportAnalog(pin - DIGITAL_PINS, mode === MODE_ANALOG);
    modes[pin] = mode;
    if (mode === MODE_SERVO && pin >= FIRST_FREE_PIN) slots.attach(pin, MIN_PULSE_US, MAX_PULSE_US);
    setLevel(pin, 0);
  };

  const reportAnalog = (channel: number, on: boolean): void => {
    if (channel >= ANALOG_INPUTS) return;
    reporting[channel] = on ? 1 : 0;
    if (on) reportOne(channel, pins.read());
  };

  const reportOne = (channel: number, counts: Float64Array): void => {
    const index = inputs.indexOf(channel);
    const value = index < 0 ? 0 : (counts[index] as number);
    pins.send(Uint8Array.of(0xe0 | channel, value & 0x7f, (value >> 7) & 0x7f));
  };

  const writeAnalog = (pin: number, value: number): void => {
    if (pins.loses() || pin >= PINS) return;
    if (modes[pin] === MODE_SERVO) slots.write(pin, value);
  };

  const writeDigitalPort = (port: number, mask: number): void => {
    for (let bit = 0; bit < 8; bit++) writeDigital(port * 8 + bit, (mask >> bit) & 1);
  };

  const writeDigital = (pin: number, level: number): void => {
    if (pin < PINS && (modes[pin] === MODE_OUTPUT || modes[pin] === MODE_INPUT)) setLevel(pin, level);
  };

  const greet = (): void => {
    pins.send(Uint8Array.of(VERSION, ...PROTOCOL));
    reportFirmware();
  };

  const reportFirmware = (): void => {
    const letters = Array.from(name).flatMap((letter) => fourteenBits(letter.charCodeAt(0)));
    pins.send(Uint8Array.of(SYSEX_START, 0x79, ...PROTOCOL, ...letters, SYSEX_END));
  };

  const answerAnalogMapping = (): void => {
    const channels = Array.from({ length: PINS }, (_, pin) => (pin < DIGITAL_PINS ? NOT_ANALOG : pin - DIGITAL_PINS));
    pins.send(Uint8Array.of(SYSEX_START, 0x6a, ...channels, SYSEX_END));
  };

  const sysex = (body: Uint8Array): void => {
    const data = body.subarray(1);
    const pin = data[0] ?? PINS;
    switch (body[0]) {
      case 0x69:
        answerAnalogMapping();
        break;
      case 0x6f:
        if (data.length > 1) writeAnalog(pin, joined(data, 1) + ((data[3] ?? 0) << 14));
        break;
      case 0x70:
        if (data.length < 5 || pin >= PINS || pin < FIRST_FREE_PIN) break;
        slots.detach(pin);
        slots.attach(pin, joined(data, 1), joined(data, 3));
        setMode(pin, MODE_SERVO);
        break;
      case 0x79:
        reportFirmware();
        break;
      case 0x7a:
        if (data.length >= 2) samplingUs = Math.max(1, joined(data, 0)) * US_PER_MS;
        break;
      default:
        break;
    }
  };

  const resetPins = (): void => {
    for (let pin = 0; pin < PINS; pin++) {
      slots.detach(pin);
      modes[pin] = pin < DIGITAL_PINS ? MODE_OUTPUT : MODE_ANALOG;
      setLevel(pin, 0);
    }
    reporting.fill(0);
    samplingUs = SAMPLING_MS * US_PER_MS;
  };

  const message = (command: number, first: number, second: number): void => {
    const nibble = command & 0x0f;
    if (command === 0xf4) setMode(first, second);
    else if (command === 0xf5) writeDigital(first, second);
    else if (command >= 0xe0 && command < SYSEX_START) writeAnalog(nibble, first + (second << 7));
    else if (command >= 0xc0 && command < 0xd0) reportAnalog(nibble, first !== 0);
    else if (command >= 0x90 && command < 0xa0) writeDigitalPort(nibble, first + (second << 7));
  };

  const single = (command: number): void => {
    if (command === VERSION) pins.send(Uint8Array.of(VERSION, ...PROTOCOL));
    if (command === RESET) resetPins();
  };

  return {
    start() {
      resetPins();
      greet();
    },
    receive: firmataParser({ message, single, sysex }),
    sample() {
      const counts = pins.read();
      for (let channel = 0; channel < ANALOG_INPUTS; channel++) {
        if (reporting[channel] === 1 && !pins.loses()) reportOne(channel, counts);
      }
    },
    get samplingUs() {
      return samplingUs;
    },
  };
}

function pinUses(plan: BoardPlan): Map<number, PinUse> {
  const uses = new Map<number, PinUse>();
  plan.outputs.forEach((wiring, output) => {
    wiring.servos.forEach(({ channel }, servo) => uses.set(channel, { output, servo, powerOn: false }));
    if (wiring.power !== null)
      uses.set(wiring.power.channel, { output, servo: -1, powerOn: wiring.power.on === 'high' });
  });
  return uses;
}

function fourteenBits(value: number): [number, number] {
  return [value & 0x7f, (value >> 7) & 0x7f];
}

function joined(data: Uint8Array, at: number): number {
  return (data[at] ?? 0) + ((data[at + 1] ?? 0) << 7);
}
