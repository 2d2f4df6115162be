import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { random } from '../../src/sim/random.ts';
import { type Accepted, motionFaults, type MotionLimits } from '../motion-laws.ts';
import { DEG } from '../plans.ts';
import { governed, jerky, ride, squareRoot } from './moves.ts';

const LIMITS: MotionLimits = { minRad: -2, maxRad: 2, speedRadS: 1, accelRadS2: 4 };
const seeds = fc.integer({ min: 0, max: 2 ** 31 - 1 });

/** Shortest time from standing to standing: with a coast if the speed limit is reached, without one if not. */
function shortestS(distance: number, v: number, a: number): number {
  return (v * v) / a <= distance ? distance / v + v / a : 2 * Math.sqrt(distance / a);
}

describe('the shortest time of a move', () => {
  // Trapezoid T = D / v + v / a, triangle T = 2 sqrt(D / a): K. M. Lynch and F. C. Park, Modern Robotics, Cambridge
  // University Press 2017, section 9.2 (from memory, recomputed).
  it.each([
    [1, 1, 2, 1.5],
    [10, 5, 10, 2.5],
    // By hand: v^2 / a = 4 is more than 1, so 2 sqrt(1 / 1).
    [1, 2, 1, 2],
  ])('of %s rad at %s rad/s and %s rad/s^2 is %s s, and is met within one tick', (distance, v, a, time) => {
    expect(shortestS(distance, v, a)).toBeCloseTo(time, 12);
    const far = { minRad: -100, maxRad: 100, speedRadS: v, accelRadS2: a };
    const { arrivedS, tickS } = ride(governed(far), distance, 7);
    expect(arrivedS).toBeGreaterThanOrEqual(time - 1e-9);
    expect(arrivedS).toBeLessThanOrEqual(time + tickS);
  });
});

describe('20,000 random moves with steps jittered forty-fold', () => {
  it('keep speed and acceleration to 1e-8, never overshoot, and take the shortest time to within one tick', () => {
    const worst = { speed: 0, accel: 0, overshoot: 0, late: 0 };
    fc.assert(
      fc.property(seeds, (seed) => {
        const chance = random(seed, 1);
        for (let i = 0; i < 200; i++) {
          const distance = 10 ** chance.between(-6, 0.5);
          const target = distance * (chance.uniform() < 0.5 ? -1 : 1);
          const v = 10 ** chance.between(-1, 1);
          const a = 10 ** chance.between(-0.5, 1.5);
          const mover = governed({ minRad: -10, maxRad: 10, speedRadS: v, accelRadS2: a });
          let speedBefore = 0;
          let timeS = 0;
          let tickS = 0;
          while (mover.x !== target || mover.v !== 0) {
            const dtS = chance.between(0.0005, 0.02);
            timeS += dtS;
            tickS = Math.max(tickS, dtS);
            mover.step(target, dtS);
            worst.speed = Math.max(worst.speed, Math.abs(mover.v) - v);
            worst.accel = Math.max(worst.accel, Math.abs(mover.v - speedBefore) / dtS - a);
            worst.overshoot = Math.max(worst.overshoot, Math.abs(mover.x) - distance);
            speedBefore = mover.v;
            if (timeS > 1000) break;
          }
          worst.late = Math.max(worst.late, timeS - shortestS(distance, v, a) - tickS);
        }
      }),
      { numRuns: 100 },
    );
    expect(worst.speed).toBeLessThan(1e-8);
    expect(worst.accel).toBeLessThan(1e-8);
    expect(worst.overshoot).toBeLessThanOrEqual(0);
    expect(worst.late).toBeLessThan(1e-9);
  });
});

describe('the law "finite, in range, within rate"', () => {
  const toTheEnd = (mover: Parameters<typeof ride>[0]): string[] =>
    motionFaults(ride(mover, LIMITS.maxRad, 3).commands.slice(0, 2_000), [LIMITS]);

  it('has nothing against the governor, even on its way to the end of the range', () => {
    expect(toTheEnd(governed(LIMITS))).toEqual([]);
  });

  it('catches the sampled square root, which overshoots', () => {
    expect(toTheEnd(squareRoot(LIMITS)).some((fault) => fault.includes('out of range'))).toBe(true);
  });

  it('catches one that ignores the acceleration limit', () => {
    const faults = toTheEnd(jerky(LIMITS));
    expect(faults.length).toBeGreaterThan(0);
    for (const fault of faults) expect(fault).toContain('too hard');
  });

  it('catches one that is too fast, and one that says no number', () => {
    expect(toTheEnd(governed({ ...LIMITS, speedRadS: 1.01 })).some((fault) => fault.includes('too fast'))).toBe(true);
    const lost: Accepted[] = [0, 1, Number.NaN].map((x, i) => ({ tUs: i * 1e7, anglesRad: [x] }));
    expect(motionFaults(lost, [LIMITS]).some((fault) => fault.includes('no angle'))).toBe(true);
  });
});

describe('a joint, whatever it is asked for,', () => {
  it('stays finite, in range and within rate, through new targets, brakes and braking targets of its own', () => {
    const order = fc.record({
      forSteps: fc.integer({ min: 1, max: 12 }),
      target: fc.double({ min: -2, max: 2, noNaN: true }),
      targetSpeed: fc.oneof(fc.constant(0), fc.double({ min: -1.5, max: 1.5, noNaN: true })),
      speed: fc.constantFrom(1, 1, 0.5, 0.1, 0),
      braking: fc.boolean(),
    });
    fc.assert(
      fc.property(fc.array(order, { minLength: 1, maxLength: 30 }), seeds, (orders, seed) => {
        const chance = random(seed, 0);
        const mover = governed(LIMITS);
        const commands: Accepted[] = [{ tUs: 0, anglesRad: [0] }];
        let tUs = 0;
        for (const { forSteps, target, targetSpeed, speed, braking } of orders) {
          mover.inside.speed[0] = speed;
          mover.inside.targetSpeed[0] = targetSpeed;
          mover.inside.braking[0] = braking ? 1 : 0;
          for (let i = 0; i < forSteps; i++) {
            const stepUs = Math.round(chance.between(500, 60_000));
            tUs += stepUs;
            mover.step(target, stepUs / 1e6);
            commands.push({ tUs, anglesRad: [mover.x] });
          }
        }
        expect(motionFaults(commands, [LIMITS])).toEqual([]);
      }),
      { numRuns: 300 },
    );
  });

  it('brakes down to a speed limit that was lowered, at its acceleration limit', () => {
    const mover = governed({ ...LIMITS, minRad: -100, maxRad: 100 });
    for (let i = 0; i < 50; i++) mover.step(50, 0.02);
    expect(mover.v).toBe(1);
    mover.inside.speed[0] = 0.5;
    mover.step(50, 0.02);
    // By hand: 1 - 4 * 0.02.
    expect(mover.v).toBeCloseTo(0.92, 12);
    for (let i = 0; i < 10; i++) mover.step(50, 0.02);
    expect(mover.v).toBeCloseTo(0.5, 12);
  });

  it('comes to a stand as soon as it can when it is to brake, and stays', () => {
    const mover = governed(LIMITS);
    for (let i = 0; i < 20; i++) mover.step(2, 0.02);
    const { x, v } = mover;
    mover.inside.braking[0] = 1;
    for (let i = 0; i < 20; i++) mover.step(2, 0.02);
    // By hand: v^2 / 2A.
    expect(mover.x).toBeCloseTo(x + (v * v) / 8, 12);
    expect(mover.inside.still()).toBe(true);
  });
});

describe('a moving target', () => {
  /** How far a joint is behind a target that has run at `speed` for `forS` seconds. */
  const behind = (speed: number, known: boolean, forS: number): number => {
    const mover = governed({ minRad: -100, maxRad: 100, speedRadS: 4, accelRadS2: 240 * DEG });
    let target = 0;
    for (let t = 0; t < forS; t += 0.02) {
      target += speed * 0.02;
      mover.inside.targetSpeed[0] = known ? speed : 0;
      mover.step(target, 0.02);
    }
    return target - mover.x;
  };

  it('costs v^2 / 2A of lag while its speed is not known', () => {
    // By hand: 60 deg/s at 240 deg/s^2 are 3600 / 480 = 7.5 degrees, up to one step's way of 1.2.
    const lag = behind(60 * DEG, false, 5) / DEG;
    expect(Math.abs(lag - 7.5)).toBeLessThan(1.2);
  });

  it('is matched without lag where its speed is known', () => {
    expect(Math.abs(behind(60 * DEG, true, 5))).toBeLessThan(1e-9);
    expect(Math.abs(behind(-60 * DEG, true, 5))).toBeLessThan(1e-9);
  });

  it('that is faster than the joint may be is followed at the speed limit', () => {
    const mover = governed({ ...LIMITS, minRad: -100, maxRad: 100 });
    let fastest = 0;
    for (let i = 1; i <= 100; i++) {
      mover.inside.targetSpeed[0] = 3;
      mover.step(3 * 0.02 * i, 0.02);
      fastest = Math.max(fastest, mover.v);
    }
    expect(fastest).toBeLessThanOrEqual(1 + 1e-9);
    expect(mover.v).toBeCloseTo(1, 9);
  });

  it('that rushes out of the range is left in time', () => {
    const mover = governed(LIMITS);
    const commands: Accepted[] = [{ tUs: 0, anglesRad: [0] }];
    for (let i = 1; i <= 200; i++) {
      const target = i * 0.02;
      mover.inside.targetSpeed[0] = target < 2 ? 1 : 0;
      mover.step(Math.min(target, 2), 0.02);
      commands.push({ tUs: i * 20_000, anglesRad: [mover.x] });
    }
    expect(motionFaults(commands, [LIMITS])).toEqual([]);
    expect(mover.x).toBe(2);
  });
});
