import type { Clock } from '../clock/clock.ts';
import { type Servo, servo, type ServoOptions } from './servo.ts';

/** The servos of one simulated arm on a clock: what its board drives, and what an eye beside it would see. */
export interface ServoArm {
  readonly name: string;
  readonly servos: number;
  /** Pulse of a servo from its board's next refresh on, in microseconds; NaN ends the pulses. */
  pulse(index: number, pulseUs: number): void;
  /** Pulses move nothing without power. */
  power(on: boolean): void;
  readonly powered: boolean;
  /** True angle of a servo's horn now, in radians of its map. */
  angleRad(index: number): number;
  /** Pulse a servo gets now, in microseconds; NaN without pulses. */
  pulseUs(index: number): number;
  /** Highest speed of a servo's horn since the start or `forgetSpeed`, as a mean over 20 ms. */
  speedMaxRadS(index: number): number;
  forgetSpeed(): void;
}

export interface ArmOptions {
  readonly name: string;
  readonly servos: readonly ArmServoOptions[];
}

export interface ArmServoOptions extends ServoOptions {
  /** Joints by index whose weighted sum is the servo's angle, for boards that are told degrees. */
  readonly turns: readonly { readonly joint: number; readonly weight: number }[];
}

export function servoArm(clock: Clock, options: ArmOptions): ServoArm {
  const servos = options.servos.map((each) => servo(each, clock.nowUs()));
  const at = (index: number): Servo => {
    const found = servos[index];
    if (found === undefined) throw new RangeError(`arm ${options.name} has no servo ${index}`);
    return found;
  };
  let powered = true;

  return {
    name: options.name,
    servos: servos.length,
    pulse: (index, pulseUs) => at(index).setPulse(clock.nowUs(), pulseUs),
    power(on) {
      powered = on;
      for (const each of servos) each.setPower(clock.nowUs(), on);
    },
    get powered() {
      return powered;
    },
    angleRad: (index) => at(index).angleRad(clock.nowUs()),
    pulseUs: (index) => at(index).pulseUs(clock.nowUs()),
    speedMaxRadS: (index) => at(index).speedMaxRadS(clock.nowUs()),
    forgetSpeed() {
      for (const each of servos) each.forgetSpeed(clock.nowUs());
    },
  };
}
