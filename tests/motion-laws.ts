/** What every stage that moves an arm is held to: "finite, in range, within rate" is this one function. */

export interface MotionLimits {
  readonly minRad: number;
  readonly maxRad: number;
  /** The highest speed limit in force, rad/s. */
  readonly speedRadS: number;
  readonly accelRadS2: number;
}

/** One command as a port accepted it, in order of time. */
export interface Accepted {
  readonly tUs: number;
  readonly anglesRad: ArrayLike<number>;
}

/** Rounding of sums of doubles, as a share of a limit and in radians. */
const SHARE = 1e-6;
const ROUNDING_RAD = 1e-9;

/**
 * Every law that an unbroken sequence of commands breaks, in words; none: it is lawful.
 * For three successive commands with mean speeds v1, v2 over dt1, dt2: |v| <= V and |2 (v2 - v1) / (dt1 + dt2)| <= A,
 * which holds for any sampling of a motion that keeps both limits.
 */
export function motionFaults(commands: readonly Accepted[], joints: readonly MotionLimits[]): string[] {
  const faults: string[] = [];
  joints.forEach((limits, j) => {
    let speedBefore = Number.NaN;
    let dtBefore = Number.NaN;
    commands.forEach((command, i) => {
      const x = command.anglesRad[j] as number;
      const at = `joint ${j} at ${command.tUs} us`;
      if (!Number.isFinite(x)) faults.push(`${at}: ${x} is no angle`);
      if (x < limits.minRad - ROUNDING_RAD || x > limits.maxRad + ROUNDING_RAD)
        faults.push(`${at}: ${x} rad is out of range`);
      const before = commands[i - 1];
      if (before === undefined) return;
      const dt = (command.tUs - before.tUs) / 1e6;
      if (!(dt > 0)) faults.push(`${at}: time stands still`);
      const speed = (x - (before.anglesRad[j] as number)) / dt;
      if (!(Math.abs(speed) <= limits.speedRadS * (1 + SHARE))) faults.push(`${at}: ${speed} rad/s is too fast`);
      const accel = (2 * (speed - speedBefore)) / (dt + dtBefore);
      if (Math.abs(accel) > limits.accelRadS2 * (1 + SHARE)) faults.push(`${at}: ${accel} rad/s^2 is too hard`);
      speedBefore = speed;
      dtBefore = dt;
    });
  });
  return faults;
}
