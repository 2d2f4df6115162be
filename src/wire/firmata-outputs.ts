import {
  analogBytes,
  DIGITAL_BYTES,
  MODE_OUTPUT,
  PIN_MODE_BYTES,
  PIN_STATE_QUERY_BYTES,
  putAnalog,
  putDigital,
  putPinMode,
  putServoConfig,
  SERVO_CONFIG_BYTES,
} from './firmata-messages.ts';
import { type PulseGrid, pulseGrid, pulseSteps } from './pulse-grid.ts';
import type { Frame, OutputWiring, ServoWiring } from './types.ts';

/** Servos and power of all followers on one Firmata board, and what the board has been told about them. */
export interface FirmataOutputs {
  bytesMax(output: number): number;
  encode(output: number, frame: Frame, out: Uint8Array): number;
  limp(output: number, out: Uint8Array): number;
  power(output: number, on: boolean, out: Uint8Array): number;
  /** The board has restarted: it has been told nothing, and nothing is known of it. */
  forget(): void;
  /** What the board has told: how many pins, and which of them serve as inputs. */
  learn(pins: number, inputs: readonly number[]): void;
}

/**
 * The pin whose servo slot is set before a servo takes it over. Attaching a servo starts pulses at whatever its slot
 * last had (1500 us at first) until its position has come, half a millisecond later at 57600 baud: one blow in forty.
 * StandardFirmata gives the next servo the slot freed last, so the position is put there first, on a pin that carries
 * nothing: 13 has the board's light, which the firmware itself blinks at each start.
 */
const SPARE_PIN = 13;
const PRIMING_BYTES = SERVO_CONFIG_BYTES + analogBytes(SPARE_PIN) + PIN_MODE_BYTES;

export function firmataOutputs(outputs: readonly OutputWiring[]): FirmataOutputs {
  const grids = outputs.map((output) => pulseGrid(output.servos, 1));
  const limits = outputs.map((output) => output.servos.map(configuredLimits));
  const attached = outputs.map((output) => new Uint8Array(output.servos.length));
  const powerSet = new Uint8Array(outputs.length);
  const spareIsOurs = outputs.some(
    ({ servos, power }) => power?.channel === SPARE_PIN || servos.some(({ channel }) => channel === SPARE_PIN),
  );
  let canPrime = false;
  /** Levels of each eight-pin port. A digital message sets all eight, so power outputs must be known to stay as they are. */
  const levels = new Uint8Array(16);

  const setLevel = (pin: number, high: boolean): void => {
    const port = pin >> 3;
    const bit = 1 << (pin & 7);
    levels[port] = high ? (levels[port] as number) | bit : (levels[port] as number) & ~bit;
  };

  const attach = (pin: number, { minUs, maxUs }: Limits, us: number, out: Uint8Array, from: number): number => {
    let at = from;
    if (canPrime) {
      at = putServoConfig(SPARE_PIN, minUs, maxUs, out, at);
      at = putAnalog(SPARE_PIN, us, out, at);
      at = putPinMode(SPARE_PIN, MODE_OUTPUT, out, at);
    }
    return putServoConfig(pin, minUs, maxUs, out, at);
  };

  const forget = (): void => {
    canPrime = false;
    for (const servos of attached) servos.fill(0);
    powerSet.fill(0);
    levels.fill(0);
    for (const { power } of outputs) if (power !== null) setLevel(power.channel, power.on === 'low');
  };
  forget();

  return {
    forget,
    learn(pins, inputs) {
      canPrime = pins > SPARE_PIN && !spareIsOurs && !inputs.includes(SPARE_PIN);
    },
    bytesMax(output) {
      const { servos } = outputs[output] as OutputWiring;
      const attaching = PRIMING_BYTES + SERVO_CONFIG_BYTES;
      const command = servos.reduce((sum, servo) => sum + attaching + analogBytes(servo.channel), 0);
      return Math.max(command, PIN_MODE_BYTES + DIGITAL_BYTES, PIN_STATE_QUERY_BYTES);
    },
    encode(output, frame, out) {
      const { servos } = outputs[output] as OutputWiring;
      const grid = grids[output] as PulseGrid;
      const isAttached = attached[output] as Uint8Array;
      let at = 0;
      for (let servo = 0; servo < servos.length; servo++) {
        const us = pulseSteps(grid, servo, frame.pulsesUs[servo] as number);
        frame.sentUs[servo] = us;
        if (servo >= frame.pulsing) continue;
        const pin = (servos[servo] as ServoWiring).channel;
        if (isAttached[servo] === 0) {
          at = attach(pin, limits[output]?.[servo] as Limits, us, out, at);
          isAttached[servo] = 1;
        }
        at = putAnalog(pin, us, out, at);
      }
      return at;
    },
    limp(output, out) {
      const { servos } = outputs[output] as OutputWiring;
      let at = 0;
      let ports = 0;
      // In the reverse order of attaching: where no spare pin is free, each servo then gets its own slot back.
      for (let servo = servos.length - 1; servo >= 0; servo--) {
        const pin = (servos[servo] as ServoWiring).channel;
        at = putPinMode(pin, MODE_OUTPUT, out, at);
        ports |= 1 << (pin >> 3);
      }
      // A pulse cut in its midst leaves the pin high, and a floating pin picks up noise: drive it low.
      for (let port = 0; port < levels.length; port++) {
        if (ports & (1 << port)) at = putDigital(port, levels[port] as number, out, at);
      }
      attached[output]?.fill(0);
      return at;
    },
    power(output, on, out) {
      const { power } = outputs[output] as OutputWiring;
      if (power === null) return 0;
      let at = 0;
      // Old firmware drives a pin low when its mode is set: once is enough.
      if (powerSet[output] === 0) at = putPinMode(power.channel, MODE_OUTPUT, out, at);
      powerSet[output] = 1;
      setLevel(power.channel, on === (power.on === 'high'));
      return putDigital(power.channel >> 3, levels[power.channel >> 3] as number, out, at);
    },
  };
}

interface Limits {
  readonly minUs: number;
  readonly maxUs: number;
}

/**
 * Limits to configure a servo with. The AVR library keeps them as 8-bit counts of 4 us steps from 544 and from 2400
 * (arduino-libraries/Servo, src/avr/Servo.cpp) and wraps what does not fit; so they are widened to its grid and its
 * window. The exact span is kept here, by `pulseSteps`.
 */
function configuredLimits({ minUs, maxUs }: ServoWiring): Limits {
  return {
    minUs: Math.min(544 + 4 * Math.floor((minUs - 544) / 4), 544 + 4 * 127),
    maxUs: Math.max(2_400 + 4 * Math.ceil((maxUs - 2_400) / 4), 2_400 - 4 * 127),
  };
}
