import { describe, expect, it } from 'vitest';
import { oneEuro } from '../../src/leader/one-euro.ts';
import type { OneEuroSpec } from '../../src/leader/spec.ts';
import { MS } from '../plans.ts';

const SMOOTH: OneEuroSpec = { cutoffHz: 1, betaHzPerRadS: 0, slopeCutoffHz: 1 };

/** Filters `values` taken every `stepUs`; with `resetAt`, forgets the past before that value. */
function filtered(spec: OneEuroSpec | null, values: readonly number[], stepUs = 10 * MS, resetAt = -1): number[] {
  const filter = oneEuro([spec]);
  const input = new Float64Array(1);
  const output = new Float64Array(1);
  return values.map((value, i) => {
    if (i === resetAt) filter.reset(0);
    input[0] = value;
    filter.push(0, Float64Array.of(i * stepUs), input, output);
    return output[0] as number;
  });
}

describe('the one-euro filter', () => {
  it('passes the first value through', () => {
    expect(filtered(SMOOTH, [7])).toEqual([7]);
  });

  it('is a plain low-pass of its cutoff while nothing depends on speed', () => {
    // By hand: at 1 Hz and 100 readings a second alpha = 1 / (1 + 100 / 2 pi).
    const alpha = 1 / (1 + 100 / (2 * Math.PI));
    const [, first, second] = filtered(SMOOTH, [0, 1, 1]);
    expect(first).toBeCloseTo(alpha, 14);
    expect(second).toBeCloseTo(alpha + alpha * (1 - alpha), 14);
  });

  it('lets go the faster the joint turns', () => {
    const ramp = Array.from({ length: 50 }, (_, i) => i * 0.02);
    const lag = (beta: number): number => 49 * 0.02 - (filtered({ ...SMOOTH, betaHzPerRadS: beta }, ramp).at(-1) ?? 0);
    expect(lag(5)).toBeLessThan(lag(0.5));
    expect(lag(0.5)).toBeLessThan(lag(0));
  });

  it('takes its rate from the stamps', () => {
    // By hand: 20 readings a second.
    const alpha = 1 / (1 + 20 / (2 * Math.PI));
    expect(filtered(SMOOTH, [0, 1], 50 * MS)[1]).toBeCloseTo(alpha, 14);
  });

  it('keeps its rate where a stamp does not advance, and stays finite', () => {
    const filter = oneEuro([{ ...SMOOTH, betaHzPerRadS: 1 }]);
    const cell = new Float64Array(1);
    const said: number[] = [];
    for (const [tUs, value] of [
      [0, 0],
      [10_000, 1],
      [10_000, 2],
      [10_000, 3],
      [20_000, 4],
    ] as const) {
      cell[0] = value;
      filter.push(0, Float64Array.of(tUs), cell, cell);
      said.push(cell[0]);
    }
    expect(said.every((v) => Number.isFinite(v) && v >= 0 && v <= 4)).toBe(true);
  });

  it('forgets its past on a reset', () => {
    expect(filtered(SMOOTH, [0, 0, 5, 5], 10 * MS, 2).slice(2)).toEqual([5, 5]);
  });

  it('is off where a joint has none', () => {
    expect(filtered(null, [3, 900, 4])).toEqual([3, 900, 4]);
  });
});
