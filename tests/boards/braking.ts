import { expect } from 'vitest';
import type { Pins, Pulse } from './pins.ts';
import { AGE_US, COMMAND_US, FRAME_US, KNOWN_US, NEAR_US, US_PER_DEG } from './timing.ts';
import { calm, decelerationOf, effort, pulseAt, settledUs, trainOf } from './trains.ts';
import type { PulseLimits } from './trains.ts';

/** A joint of 60 deg/s and 240 deg/s^2, as pulses show it. */
export const SPEED_US_S = 60 * US_PER_DEG;
const ACCEL_US_S2 = 240 * US_PER_DEG;
export const LIMITS: PulseLimits = { speed: SPEED_US_S, accel: ACCEL_US_S2, commandUs: COMMAND_US };
/** v^2 / 2A = 60^2 / 480 = 7.5 degrees, in v / A = 60 / 240 = 0.25 s. */
export const BRAKING_US = 7.5 * US_PER_DEG;
export const BRAKING_TIME_US = 250_000;

/** Calm pulses this close are one position; a brake needs sqrt(2 * 2 / (240 * 10.4)) = 40 ms for the last of it. */
const STILL_US = 2;
export const STILL_TIME_US = 40_000;

/** Rounding, and a pulse that has missed its command, make this much of a brake's hardness uncertain, as a share. */
const HARDNESS_ERROR = 0.15;

/** From an instant on the servo is asked for one and the same position. */
export function expectStill(board: Pins, pin: number, fromUs: number): void {
  const train = trainOf(board, pin, fromUs);
  expect(train.length).toBeGreaterThan(10);
  for (const { widthUs } of train) expect(Math.abs(widthUs - (train[0]?.widthUs ?? 0))).toBeLessThanOrEqual(NEAR_US);
}

/** Every pulse is inside the limits. */
export function expectInsideLimits(train: readonly Pulse[]): void {
  for (const frames of [5, 10]) {
    const { speed, accel } = effort(train, frames, LIMITS);
    expect(speed).toBeLessThanOrEqual(1);
    expect(accel).toBeLessThanOrEqual(1);
  }
}

/**
 * An arm at full speed comes to a stand within its braking distance and inside its limits.
 * @param calledUs when something happened that has to make it brake
 * @param heardUs how much later that can be known, at the soonest and at the latest
 * @param endUs later pulses do not count: the last one may be cut
 * @returns the end of the last pulse that moved the servo by more than rounding
 */
export function expectBraking(
  board: Pins,
  pin: number,
  calledUs: number,
  heardUs: readonly [number, number],
  endUs: number = Number.POSITIVE_INFINITY,
): number {
  const [soonestUs, latestUs] = heardUs;
  const before = pulseAt(board, pin, calledUs).widthUs;
  const train = trainOf(board, pin, calledUs - 300_000, endUs);
  const goneUs = Math.abs((train.at(-1)?.widthUs ?? Number.NaN) - before);
  // The last pulse is of an earlier command, and the arm runs on until its first braking one.
  const runUs = (us: number): number => (SPEED_US_S * us) / 1e6;
  expect(goneUs).toBeGreaterThan(BRAKING_US + runUs(soonestUs) - NEAR_US);
  expect(goneUs).toBeLessThan(BRAKING_US + runUs(AGE_US + latestUs + COMMAND_US) + NEAR_US);
  const stoodUs = settledUs(calm(train), STILL_US);
  expect(stoodUs - calledUs).toBeGreaterThan(soonestUs + BRAKING_TIME_US - STILL_TIME_US - FRAME_US);
  expect(stoodUs - calledUs).toBeLessThan(latestUs + COMMAND_US + BRAKING_TIME_US + KNOWN_US);
  expectInsideLimits(train);
  return stoodUs;
}

/** The same, as hard as it may, and then it stays where it is. */
export function expectBrakeAndHold(
  board: Pins,
  pin: number,
  calledUs: number,
  heardUs: readonly [number, number],
): void {
  const stoodUs = expectBraking(board, pin, calledUs, heardUs);
  const hardness = decelerationOf(calm(trainOf(board, pin, calledUs))) / ACCEL_US_S2;
  expect(Math.abs(hardness - 1)).toBeLessThan(HARDNESS_ERROR);
  expectStill(board, pin, stoodUs + FRAME_US);
}
