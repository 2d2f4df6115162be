import { commandBytes, SERVOS_MAX as FRAMES_SERVOS_MAX, READINGS_MAX } from './frames-layout.ts';
import { analogBytes } from './firmata-messages.ts';
import { templateOf } from './lines-commands.ts';
import type { WireChoice } from './choice.ts';
import type { BoardPlan, OutputWiring, WireAbility } from './types.ts';

/** What each wire can carry, for checks before anything moves. */
export const WIRE_ABILITIES: Record<WireChoice['name'], WireAbility> = {
  lines: {
    bothEnds: true,
    stepUs: 1,
    pulseMinUs: 1,
    // One period of a 50 Hz servo signal; a longer pulse has no room.
    pulseMaxUs: 20_000,
    servoChannels: [0, 255],
    // A line of 256 bytes holds at most this many columns of one digit.
    inputChannels: [0, 127],
    servosMax: 128,
    canLimp: true,
    canPower: true,
    baudDefault: 115_200,
  },
  frames: {
    bothEnds: true,
    stepUs: 1 / 8,
    pulseMinUs: 1,
    pulseMaxUs: 8_191,
    servoChannels: [0, 255],
    // All of them fit one readings frame that starts at channel 0.
    inputChannels: [0, READINGS_MAX - 1],
    servosMax: FRAMES_SERVOS_MAX,
    canLimp: true,
    canPower: true,
    baudDefault: 115_200,
  },
  firmata: {
    bothEnds: true,
    stepUs: 1,
    // Below 544 the AVR Servo library takes a number for degrees (arduino-libraries/Servo, src/avr/Servo.cpp).
    pulseMinUs: 544,
    // It keeps the upper limit as an 8-bit count of 4 us steps from 2400: 2400 + 4 * 128.
    pulseMaxUs: 2_912,
    servoChannels: [0, 127],
    inputChannels: [0, 15],
    // MAX_SERVOS of the library on the largest AVR board.
    servosMax: 48,
    canLimp: true,
    canPower: true,
    // StandardFirmata's own serial speed.
    baudDefault: 57_600,
  },
};

/**
 * Bytes of the longest command that this output sends again and again, to be weighed against baud and rate.
 * Firmata's configuration of a servo is sent once, with its first pulse, and is not counted. 0 for a `lines` output
 * without a template, or with a mistaken one.
 */
export function frameBytes(choice: WireChoice, plan: BoardPlan, output: number): number {
  const wiring = plan.outputs[output] as OutputWiring;
  switch (choice.name) {
    case 'lines': {
      const template = templateOf(choice.lines, wiring);
      return template?.kind === 'template' ? template.bytesMax : 0;
    }
    case 'frames':
      return commandBytes(wiring.servos.length);
    case 'firmata':
      return wiring.servos.reduce((sum, servo) => sum + analogBytes(servo.channel), 0);
  }
}
