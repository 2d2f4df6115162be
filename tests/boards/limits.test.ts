/** A hand that jumps, and an arm that must not: speed and acceleration of the pulses themselves. */
import { beforeAll, describe, expect, it } from 'vitest';
import type { Pulse } from './pins.ts';
import { COMMAND_US, FRAME_US, NEAR_US, US_PER_DEG } from './timing.ts';
import { effort, trainOf, widthsOf } from './trains.ts';
import type { PulseLimits } from './trains.ts';
import { troupe } from './troupe.ts';

const RIG = `
rig: jumps
leader:
  leader: handstick
  port: serial:/dev/ttyACM0
  wire: firmata
  joints:
    - { name: base, channel: 0, points: [[112, -120], [912, 120]] }
    - { name: nod,  channel: 1, points: [[112, -120], [912, 120]] }
followers:
  - follower: stork
    port: serial:/dev/ttyACM1
    wire: firmata
    rate_hz: 50
    join: { speed: 1 }
    joints:
      - name: base                        # heavy: it takes 0.67 s to its speed
        from: base
        range_deg: [-80, 80]
        speed_deg_s: 40
        accel_deg_s2: 60
        servo: { channel: 5, points: [[-90, 560], [90, 2440]] }
      - name: nod                         # light: 0.2 s
        from: nod
        range_deg: [-60, 60]
        speed_deg_s: 180
        accel_deg_s2: 900
        servo: { channel: 6, points: [[-90, 560], [90, 2440]] }
`;
const BASE = 5;
const NOD = 6;
const limits = (speedDegS: number, accelDegS2: number): PulseLimits => ({
  speed: speedDegS * US_PER_DEG,
  accel: accelDegS2 * US_PER_DEG,
  commandUs: COMMAND_US,
});
const BASE_LIMITS = limits(40, 60);
const NOD_LIMITS = limits(180, 900);

/** Counts of base and nod, and how long they are held, ms: long swings that are turned in full speed, and short hops. */
const JUMPS: readonly (readonly [base: number, nod: number, ms: number])[] = [
  [850, 250, 2200],
  [150, 800, 600],
  [150, 200, 900],
  [700, 800, 800],
  [300, 250, 700],
  [800, 750, 650],
  [400, 512, 2500],
];

describe('an arm under jumping pots, judged from its pins', () => {
  let base: Pulse[];
  let nod: Pulse[];
  beforeAll(() => {
    const all = troupe(RIG);
    all.turn(512, 512);
    all.until('the boards answer', 3_000_000, () => all.state('stork') === 'waking');
    all.key('go');
    all.until('stork follows', 2_000_000, () => all.state('stork') === 'following');
    const sinceUs = all.clock.nowUs();
    for (const [baseCounts, nodCounts, ms] of JUMPS) {
      all.turn(baseCounts, nodCounts);
      all.wait(ms * 1_000);
    }
    const { board } = all.at('serial:/dev/ttyACM1');
    base = trainOf(board, BASE, sinceUs);
    nod = trainOf(board, NOD, sinceUs);
  });

  it('gets a pulse every 20 ms all the while', () => {
    for (const train of [base, nod]) {
      expect(train.length).toBeGreaterThan(400);
      for (let at = 1; at < train.length; at++)
        expect(Math.abs((train[at]?.startUs ?? 0) - (train[at - 1]?.startUs ?? 0) - FRAME_US)).toBeLessThan(100);
    }
  });

  // Windows of 0.1, 0.2, 0.4 and 0.6 s: the short ones see a single wrong command, the long ones leave rounding little room.
  it.each([5, 10, 20, 30])('keeps its limits over windows of %i frames', (frames) => {
    for (const [train, most] of [
      [base, BASE_LIMITS],
      [nod, NOD_LIMITS],
    ] as const) {
      const { speed, accel } = effort(train, frames, most);
      expect(speed).toBeLessThanOrEqual(1);
      expect(accel).toBeLessThanOrEqual(1);
    }
  });

  it('uses its limits, so that the pins would show any that are too high', () => {
    // A swing that is turned in full speed accelerates for 2 * 40 / 60 = 1.33 s, and the light joint for 0.4 s:
    // more than two windows each.
    const heavy = effort(base, 30, BASE_LIMITS);
    const light = effort(nod, 9, NOD_LIMITS);
    for (const { speedShown, accelShown } of [heavy, light]) {
      expect(speedShown).toBeGreaterThan(0.97);
      expect(accelShown).toBeGreaterThan(0.9);
    }
    const percent = (share: number): string => `${(100 * share).toFixed(1)} %`;
    console.log(
      `limits as the pins show them: heavy joint ${percent(heavy.speedShown)} of its speed and ` +
        `${percent(heavy.accelShown)} of its acceleration, light joint ${percent(light.speedShown)} and ` +
        `${percent(light.accelShown)}`,
    );
    expect(effort(base, 30, limits(40 * 0.85, 60)).speed).toBeGreaterThan(1);
    expect(effort(base, 30, limits(40, 60 * 0.85)).accel).toBeGreaterThan(1);
  });

  it('never passes the targets it is sent between', () => {
    // 850 counts are 101.4 degrees, beyond the range of 80: 1500 + 80 * 10.444 = 2335.6 us. 150 counts: -108.6, 664.4 us.
    // The light joint's 800 and 200 counts are 86.4 and -93.6 degrees, its range 60: 2126.7 and 873.3 us.
    for (const [train, low, high] of [
      [base, 664, 2336],
      [nod, 873, 2127],
    ] as const) {
      const widths = widthsOf(train);
      expect(Math.min(...widths)).toBeGreaterThanOrEqual(low - NEAR_US);
      expect(Math.max(...widths)).toBeLessThanOrEqual(high + NEAR_US);
    }
    // The last jump takes the heavy joint from above to 400 counts, -33.6 degrees, and the light one to 512, zero.
    for (const [train, us] of [
      [base, 1149],
      [nod, 1500],
    ] as const) {
      for (const width of widthsOf(train).slice(-10)) expect(Math.abs(width - us)).toBeLessThanOrEqual(NEAR_US);
    }
    expect(Math.min(...widthsOf(base).slice(-120))).toBeGreaterThanOrEqual(1149 - NEAR_US);
  });
});
