/** How a horn goes best on a servo's spline. */
export interface HornCentring {
  /** Angle of one step of the spline, degrees. */
  readonly stepDeg: number;
  /** Steps to turn the horn on the spline, positive the way angles are counted. */
  readonly steps: number;
  /** What no step can take away, degrees: the servo's points have to. */
  readonly leftDeg: number;
}

/**
 * The servo stands at its middle pulse, the horn stands `offDeg` past where the joint should then be: which spline step
 * brings it nearest.
 * @param teeth of the spline: 25 on most hobby servos, 24, 23 or 21 on others (common practice, no source)
 */
export function hornCentring(offDeg: number, teeth: number): HornCentring {
  const stepDeg = 360 / teeth;
  const steps = -Math.round(offDeg / stepDeg);
  // Minus zero reads badly.
  return { stepDeg, steps: steps === 0 ? 0 : steps, leftDeg: offDeg + steps * stepDeg };
}
