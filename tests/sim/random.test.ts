import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { noiseAt, random } from '../../src/sim/random.ts';

const DRAWS = 20_000;

function moments(values: readonly number[]): { mean: number; deviation: number } {
  const mean = values.reduce((sum, value) => sum + value, 0) / values.length;
  const square = values.reduce((sum, value) => sum + (value - mean) ** 2, 0) / values.length;
  return { mean, deviation: Math.sqrt(square) };
}

function correlation(a: readonly number[], b: readonly number[]): number {
  const { mean: meanA, deviation: deviationA } = moments(a);
  const { mean: meanB, deviation: deviationB } = moments(b);
  const product = a.reduce((sum, value, i) => sum + (value - meanA) * ((b[i] as number) - meanB), 0) / a.length;
  return product / (deviationA * deviationB);
}

/** Five standard errors of a mean of n values of deviation 1: a fair generator fails once in millions of seeds. */
const wide = (n: number): number => 5 / Math.sqrt(n);

describe('chance that a seed decides', () => {
  it('repeats itself for the same seed and stream', () => {
    fc.assert(
      fc.property(fc.maxSafeInteger(), fc.nat(), (seed, stream) => {
        const first = random(seed, stream);
        const again = random(seed, stream);
        for (let i = 0; i < 20; i++) expect(again.uniform()).toBe(first.uniform());
      }),
    );
  });

  it('stays in [0, 1) with mean 1/2 and deviation 1/sqrt(12), as a uniform variable has', () => {
    const chance = random(7, 0);
    const values = Array.from({ length: DRAWS }, () => chance.uniform());
    expect(Math.min(...values)).toBeGreaterThanOrEqual(0);
    expect(Math.max(...values)).toBeLessThan(1);
    const { mean, deviation } = moments(values);
    expect(Math.abs(mean - 0.5)).toBeLessThan(wide(DRAWS) / Math.sqrt(12));
    expect(Math.abs(deviation - 1 / Math.sqrt(12))).toBeLessThan(0.005);
  });

  it('gives unrelated streams for neighbouring seeds and for streams of one seed', () => {
    const draw = (seed: number, stream: number): number[] => {
      const chance = random(seed, stream);
      return Array.from({ length: DRAWS }, () => chance.uniform());
    };
    expect(Math.abs(correlation(draw(7, 0), draw(8, 0)))).toBeLessThan(wide(DRAWS));
    expect(Math.abs(correlation(draw(7, 0), draw(7, 1)))).toBeLessThan(wide(DRAWS));
    expect(Math.abs(correlation(draw(7, 0), draw(7 + 2 ** 32, 0)))).toBeLessThan(wide(DRAWS));
  });
});

describe('noise at an instant', () => {
  const series = (seed: number, channel: number, startUs = 0): number[] =>
    Array.from({ length: DRAWS }, (_, i) => noiseAt(seed, startUs + i * 5_000, channel));

  it('has mean 0 and deviation 1, and as many values within one deviation as a Gaussian', () => {
    const values = series(3, 0);
    const { mean, deviation } = moments(values);
    expect(Math.abs(mean)).toBeLessThan(wide(DRAWS));
    // Standard error of a Gaussian's deviation is 1/sqrt(2n).
    expect(Math.abs(deviation - 1)).toBeLessThan(wide(2 * DRAWS));
    // erf(1/sqrt(2)) = 0.682689 (the 68-95-99.7 rule of any statistics textbook); error sqrt(p(1-p)/n) = 0.0033.
    const within = values.filter((value) => Math.abs(value) < 1).length / DRAWS;
    expect(Math.abs(within - 0.682689)).toBeLessThan(5 * 0.0033);
  });

  it('is unrelated from one reading to the next, between channels and between seeds', () => {
    const values = series(3, 0);
    expect(Math.abs(correlation(values.slice(1), values.slice(0, -1)))).toBeLessThan(wide(DRAWS));
    expect(Math.abs(correlation(values, series(3, 1)))).toBeLessThan(wide(DRAWS));
    expect(Math.abs(correlation(values, series(4, 0)))).toBeLessThan(wide(DRAWS));
    expect(Math.abs(correlation(values, series(3, 0, 2 ** 32)))).toBeLessThan(wide(DRAWS));
  });

  it('is finite everywhere', () => {
    fc.assert(
      fc.property(fc.maxSafeInteger(), fc.maxSafeInteger(), fc.nat(100), (seed, atUs, channel) =>
        Number.isFinite(noiseAt(seed, atUs, channel)),
      ),
    );
  });
});
