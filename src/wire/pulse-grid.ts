import type { ServoWiring } from './types.ts';

/** The pulses a wire can express for each servo of an output, as whole numbers of its step. */
export interface PulseGrid {
  readonly stepsPerUs: number;
  /** First and last step inside each servo's span. */
  readonly low: Int32Array;
  readonly high: Int32Array;
}

/** Spans end on measured points such as 560.1 us, computed in floating point: this much beyond is still the point. */
const SLACK_STEPS = 1e-6;

export function pulseGrid(servos: readonly ServoWiring[], stepsPerUs: number): PulseGrid {
  const low = Int32Array.from(servos, (servo) => Math.ceil(servo.minUs * stepsPerUs - SLACK_STEPS));
  const high = Int32Array.from(servos, (servo) => Math.floor(servo.maxUs * stepsPerUs + SLACK_STEPS));
  return { stepsPerUs, low, high };
}

/**
 * Nearest step to a pulse that does not leave the servo's span: rounding must not push a command past the outer
 * points. Within half a step of the pulse, except at a span end that lies between two steps.
 */
export function pulseSteps(grid: PulseGrid, servo: number, pulseUs: number): number {
  if (!Number.isFinite(pulseUs)) throw new RangeError(`pulse of servo ${servo} is not a number`);
  const low = grid.low[servo] as number;
  const high = grid.high[servo] as number;
  const steps = (pulseUs * grid.stepsPerUs + 0.5) | 0;
  return steps < low ? low : steps > high ? high : steps;
}
