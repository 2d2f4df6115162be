/** Moves one servo by pulse width, slowly, while the rest of the arm stands: for measuring a servo that has no map yet. */
export interface Jog {
  /** Index of the servo being moved; -1: none. */
  readonly servo: number;
  /** True while its pulse has not come to where it was asked to go. */
  readonly moving: boolean;
  /**
   * Another servo is refused until the former is back home: it would snap there.
   * @param pulseUs where to, microseconds; NaN: back to the pulse of the joint's angle, and end
   */
  ask(servo: number, pulseUs: number): void;
  /** Overrides the servo's pulse, moving it by at most dtS[0] seconds' worth; false when the jog has ended. */
  step(dtS: Float64Array, pulsesUs: Float64Array): boolean;
  /** Asks it to stay where it is. */
  stay(): void;
  /** The servo is lost sight of: its pulses have ended, or nobody brings it home. */
  forget(): void;
}

/** About 10 degrees a second on a usual hobby servo (common practice, no source): a hand can be pulled away. */
const JOG_US_S = 100;

export function jog(servos: number): Jog {
  const at = new Float64Array(servos).fill(Number.NaN);
  const ask = new Float64Array(1);
  const self: { -readonly [K in keyof Jog]: Jog[K] } = {
    servo: -1,
    moving: false,
    ask(servo, pulseUs) {
      if (self.servo !== -1 && servo !== self.servo) return;
      self.servo = servo;
      ask[0] = pulseUs;
      self.moving = true;
    },
    step(dtS, pulsesUs) {
      const k = self.servo;
      const home = pulsesUs[k] as number;
      const from = Number.isNaN(at[k] as number) ? home : (at[k] as number);
      const ending = Number.isNaN(ask[0] as number);
      const to = ending ? home : (ask[0] as number);
      const most = JOG_US_S * (dtS[0] as number);
      const now = from + Math.min(Math.max(to - from, -most), most);
      at[k] = now;
      pulsesUs[k] = now;
      self.moving = now !== to;
      if (self.moving || !ending) return true;
      at[k] = Number.NaN;
      self.servo = -1;
      return false;
    },
    stay() {
      ask[0] = at[self.servo] as number;
    },
    forget() {
      at.fill(Number.NaN);
      self.servo = -1;
      self.moving = false;
    },
  };
  return self;
}
