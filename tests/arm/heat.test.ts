import { describe, expect, it } from 'vitest';
import { heat, HEAT_TIME_S } from '../../src/arm/heat.ts';

function after(seconds: number, share: number, dtS: number, from = 0): number {
  const { warmth, step } = heat(1);
  warmth[0] = from;
  const dt = Float64Array.of(dtS);
  for (let k = 0; k < Math.round(seconds / dtS); k++) step(Float64Array.of(share), dt);
  return warmth[0] as number;
}

describe('the warmth of a motor that holds', () => {
  // A first-order body: common practice, no source. By hand: after one time constant 1 - 1/e = 0.632 of the way.
  it('goes to the square of its share of the holding torque, 63 % of the way in one time constant', () => {
    expect(after(HEAT_TIME_S, 1, 0.02)).toBeCloseTo(1 - Math.exp(-1), 6);
    expect(after(HEAT_TIME_S, 0.5, 0.02)).toBeCloseTo(0.25 * (1 - Math.exp(-1)), 6);
    expect(after(20 * HEAT_TIME_S, -0.5, 1)).toBeCloseTo(0.25, 6);
  });

  it('does not depend on how often it is told', () => {
    expect(after(60, 0.8, 0.005)).toBeCloseTo(after(60, 0.8, 1), 9);
  });

  it('cools as it warms', () => {
    expect(after(HEAT_TIME_S, 0, 0.1, 0.6)).toBeCloseTo(0.6 / Math.E, 6);
  });

  it('stops at 1, however far over its limit the motor is', () => {
    expect(after(HEAT_TIME_S, 3, 1)).toBe(1);
  });

  it('stays as it is where no motor is known', () => {
    expect(after(60, Number.NaN, 1, 0.3)).toBe(0.3);
  });
});
