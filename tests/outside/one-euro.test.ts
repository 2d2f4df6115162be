import { OneEuroFilter } from '1eurofilter';
import { describe, expect, it } from 'vitest';
import { oneEuro } from '../../src/leader/one-euro.ts';
import { random } from '../../src/sim/random.ts';

/**
 * First rows of the ground truth that the filter's authors publish with it: G. Casiez, N. Roussel, D. Vogel, "1 Euro
 * Filter", CHI 2012, repository casiez/OneEuroFilter, groundTruth.csv (git blob 960045e0): time in seconds, noisy,
 * filtered, at 120 Hz with cutoff 1 Hz, beta 0.1, slope cutoff 1 Hz. Their own test passes within 1e-4.
 */
const GROUND_TRUTH: readonly (readonly [number, number, number])[] = [
  [0, -0.0385099, -0.0385099],
  [0.00833333, -0.0280664, -0.0379872],
  [0.0166667, 0.048622, -0.0334427],
  [0.025, 0.111498, -0.0252696],
  [0.0333333, 0.053026, -0.0207099],
  [0.0416667, 0.120548, -0.0119912],
  [0.05, 0.00972308, -0.0106507],
  [0.0583333, 0.074193, -0.00526521],
  [0.0666667, -0.0236801, -0.00641239],
  [0.075, 0.0462396, -0.00308863],
  [0.0833333, 0.0892027, 0.00291027],
  [0.0916667, 0.158329, 0.0135545],
  [0.1, 0.0423086, 0.01552],
  [0.108333, 0.0887203, 0.0206024],
  [0.116667, 0.039102, 0.0218784],
  [0.125, 0.140277, 0.030313],
  [0.133333, 0.156938, 0.0396331],
  [0.141667, 0.0961089, 0.0438101],
  [0.15, 0.216881, 0.0572083],
  [0.158333, 0.067538, 0.057997],
];
const AUTHORS_LIMIT = 1e-4;

/** A named filter of one value a call. */
type Filter = (tS: number, value: number) => number;

function ours(cutoffHz: number, beta: number, slopeCutoffHz: number): Filter {
  const filter = oneEuro([{ cutoffHz, betaHzPerRadS: beta, slopeCutoffHz }]);
  const cell = new Float64Array(1);
  return (tS, value) => {
    cell[0] = value;
    filter.push(0, Float64Array.of(Math.round(tS * 1e6)), cell, cell);
    return cell[0] as number;
  };
}

/** The form of before August 2023 that is still copied: the slope is taken from the previous raw value. */
function withRawSlope(cutoffHz: number, beta: number, slopeCutoffHz: number): Filter {
  const share = (hz: number, rate: number): number => 1 / (1 + rate / (2 * Math.PI * hz));
  let raw = Number.NaN;
  let value = Number.NaN;
  let slope = 0;
  let beforeS = Number.NaN;
  return (tS, x) => {
    const rate = 1 / (tS - beforeS);
    if (Number.isNaN(value)) value = x;
    else {
      slope += share(slopeCutoffHz, rate) * ((x - raw) * rate - slope);
      value += share(cutoffHz + beta * Math.abs(slope), rate) * (x - value);
    }
    raw = x;
    beforeS = tS;
    return value;
  };
}

function theirs(cutoffHz: number, beta: number, slopeCutoffHz: number): Filter {
  const filter = new OneEuroFilter(120, cutoffHz, beta, slopeCutoffHz);
  return (tS, value) => filter.filter(value, tS);
}

/** Ten seconds of a slow swing with noise, at 120 Hz with stamps rounded to microseconds. */
function noisySwing(): (readonly [number, number])[] {
  const chance = random(20, 12);
  return Array.from({ length: 1200 }, (_, i) => {
    const tS = Math.round((i * 1e6) / 120) / 1e6;
    return [tS, Math.sin(2 * Math.PI * 0.5 * tS) + 0.1 * (chance.uniform() - 0.5)] as const;
  });
}

const furthest = (a: Filter, b: Filter, samples: readonly (readonly [number, number])[]): number =>
  Math.max(...samples.map(([tS, value]) => Math.abs(a(tS, value) - b(tS, value))));

describe('the one-euro filter against its authors', () => {
  it('agrees with their ground truth within their own limit', () => {
    const filter = ours(1, 0.1, 1);
    for (const [tS, noisy, filtered] of GROUND_TRUTH)
      expect(Math.abs(filter(tS, noisy) - filtered)).toBeLessThan(AUTHORS_LIMIT);
  });

  it.each([
    [1, 0.1, 1],
    [1.5, 0.08, 1],
    [0.3, 4, 2],
    [1, 0, 1],
  ])('agrees with npm 1eurofilter over 1200 samples (cutoff %s Hz, beta %s, slope cutoff %s Hz)', (...parameters) => {
    expect(furthest(ours(...parameters), theirs(...parameters), noisySwing())).toBeLessThan(1e-9);
  });

  it('is not the old form: that one would miss both', () => {
    const old = withRawSlope(1, 0.1, 1);
    const missed = GROUND_TRUTH.filter(([tS, noisy, filtered]) => Math.abs(old(tS, noisy) - filtered) > AUTHORS_LIMIT);
    expect(missed.length).toBeGreaterThan(GROUND_TRUTH.length / 2);
    expect(furthest(withRawSlope(1, 0.1, 1), theirs(1, 0.1, 1), noisySwing())).toBeGreaterThan(10 * AUTHORS_LIMIT);
  });
});
