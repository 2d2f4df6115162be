/** What a servo makes of its pulses: trains of them, and the speed and acceleration that they ask for. */
import type { Pins, Pulse } from './pins.ts';

/** The pulses of a pin that began from `fromUs` up to `toUs`. */
export function trainOf(board: Pins, pin: number, fromUs: number, toUs: number = Number.POSITIVE_INFINITY): Pulse[] {
  return board.pulses(pin).filter(({ startUs }) => startUs >= fromUs && startUs < toUs);
}

export const widthsOf = (train: readonly Pulse[]): number[] => train.map(({ widthUs }) => widthUs);

/** The pulse that was on the pin last at an instant. */
export function pulseAt(board: Pins, pin: number, atUs: number): Pulse {
  const pulse = board.pulses(pin).findLast(({ startUs, widthUs }) => startUs + widthUs <= atUs);
  if (pulse === undefined) throw new Error(`pin ${pin} has had no pulse by ${atUs}`);
  return pulse;
}

/** When the servo knew the last pulse that differs by more than `nearUs` from the one that the train ends with. */
export function settledUs(train: readonly Pulse[], nearUs: number): number {
  const end = train.at(-1)?.widthUs ?? Number.NaN;
  const last = train.findLast(({ widthUs }) => Math.abs(widthUs - end) > nearUs);
  return last === undefined ? Number.NEGATIVE_INFINITY : last.startUs + last.widthUs;
}

/** How far a train is at most from a steady motion of `usPerS` through its first pulse, in microseconds of pulse. */
export function unsteadiness(train: readonly Pulse[], usPerS: number): number {
  const [first] = train;
  if (first === undefined) return Number.NaN;
  const off = train.map(({ startUs, widthUs }) => widthUs - first.widthUs - (usPerS * (startUs - first.startUs)) / 1e6);
  return Math.max(...off.map(Math.abs));
}

/**
 * How hard a train brakes to its end, in microseconds of pulse a second squared: with s = A t^2 / 2 still to go, the root of
 * the way left falls evenly with time, by sqrt(A / 2). Ways of 4 to 60 us count: less is rounding, more is not all braking.
 */
export function decelerationOf(train: readonly Pulse[]): number {
  const end = train.at(-1)?.widthUs ?? Number.NaN;
  const points = train.flatMap(({ startUs, widthUs }) => {
    const left = Math.abs(end - widthUs);
    return left < 4 || left > 60 ? [] : [[startUs * 1e-6, Math.sqrt(left)] as const];
  });
  const mean = (axis: 0 | 1): number => points.reduce((sum, point) => sum + point[axis], 0) / points.length;
  const [t0, root0] = [mean(0), mean(1)];
  const along = points.reduce((sum, [t, root]) => sum + (t - t0) * (root - root0), 0);
  const spread = points.reduce((sum, [t]) => sum + (t - t0) ** 2, 0);
  return 2 * (along / spread) ** 2;
}

/**
 * Takes out what one late interrupt does to one pulse (some microseconds, now and then): a median of three, which
 * leaves a rising or falling train as it is.
 */
export function calm(train: readonly Pulse[]): Pulse[] {
  return train.slice(1, -1).map(({ startUs }, at) => {
    const three = train.slice(at, at + 3).map(({ widthUs }) => widthUs);
    return { startUs, widthUs: three.toSorted((a, b) => a - b)[1] as number };
  });
}

/** Limits of one servo's motion as its pulses show them. */
export interface PulseLimits {
  /** In microseconds of pulse a second. */
  readonly speed: number;
  /** In microseconds of pulse a second squared. */
  readonly accel: number;
  /** Longest time between two commands while it moves. */
  readonly commandUs: number;
}

/** A calm pulse is its command, rounded to whole microseconds, within this. */
export const PULSE_ERROR_US = 1.5;

/**
 * The highest speed and acceleration of a train, from differences over windows of `frames` frames, each as a share of the
 * most that motion inside the limits could show.
 *
 * A pulse shows a command that is between nothing and one command interval older than it could be, so the instants of a
 * window's ends are known to P = `commandUs` only. With |v| <= V a difference over H shows at most V (H + P), and with
 * |a| <= A a second difference at most A H^2 + 2 V P; each pulse adds its own error.
 */
export function effort(
  train: readonly Pulse[],
  frames: number,
  limits: PulseLimits,
): { readonly speed: number; readonly accel: number; readonly speedShown: number; readonly accelShown: number } {
  const P = limits.commandUs * 1e-6;
  const most = { speed: 0, accel: 0, speedShown: 0, accelShown: 0 };
  const quiet = calm(train);
  for (let at = 0; at + 2 * frames < quiet.length; at++) {
    const [a, b, c] = [0, 1, 2].map((step) => quiet[at + step * frames]) as [Pulse, Pulse, Pulse];
    const H = (b.startUs - a.startUs) * 1e-6;
    const moved = Math.abs(b.widthUs - a.widthUs);
    const bent = Math.abs(c.widthUs - 2 * b.widthUs + a.widthUs);
    const speedMost = limits.speed * (H + P) + 2 * PULSE_ERROR_US;
    const accelMost = limits.accel * H * H + 2 * limits.speed * P + 4 * PULSE_ERROR_US;
    most.speed = Math.max(most.speed, moved / speedMost);
    most.accel = Math.max(most.accel, bent / accelMost);
    most.speedShown = Math.max(most.speedShown, moved / H / limits.speed);
    most.accelShown = Math.max(most.accelShown, bent / H / H / limits.accel);
  }
  return most;
}
