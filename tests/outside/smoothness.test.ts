import FFT from 'fft.js';
import fc from 'fast-check';
import { CalcCascades } from 'fili';
import { describe, expect, it } from 'vitest';
import { magnitudes } from '../../src/take/fft.ts';
import { butterworth, zeroPhase } from '../../src/take/low-pass.ts';
import { blend } from '../../src/take/minimum-jerk.ts';
import { dimensionlessJerk, logDimensionlessJerk, spectralArcLength } from '../../src/take/smoothness.ts';
import { warp } from '../../src/take/warping.ts';

/** Speed of the minimum-jerk movement over one second and unit distance, sampled at `rateHz` with both ends. */
function minimumJerkSpeed(rateHz: number): Float64Array {
  const way = blend(0, 0, 1, 0, 1);
  return Float64Array.from({ length: rateHz + 1 }, (_, i) => way.speed(i / rateHz));
}

describe('smoothness, against the published values', () => {
  // The doc-strings of the authors' code (github.com/siva82kb/SPARC, scripts/smoothness.py): t = -1..1 in steps of
  // 0.01, speed exp(-5 t^2), 100 Hz: SPARC -1.41403, dimensionless jerk -335.74684, log -5.81636.
  const bell = Float64Array.from({ length: 200 }, (_, i) => Math.exp(-5 * (-1 + 0.01 * i) ** 2));

  it('is that of the authors of the spectral arc length on their example', () => {
    expect(spectralArcLength(bell, 100)).toBeCloseTo(-1.41403, 5);
    expect(dimensionlessJerk(bell, 100)).toBeCloseTo(-335.74684, 4);
    expect(logDimensionlessJerk(bell, 100)).toBeCloseTo(-5.81636, 5);
  });

  it('of a minimum-jerk movement nears the exact dimensionless jerk, 1024/5', () => {
    // Flash & Hogan 1985: the integral of the squared jerk is 720 D^2/T^5 and the peak speed 15/8 D/T, so
    // 720 / (15/8)^2 = 204.8. Sampled, it is a little less: two end intervals are missing.
    const exact = 204.8;
    expect(Math.abs(dimensionlessJerk(minimumJerkSpeed(1000), 1000) + exact) / exact).toBeLessThan(0.003);
    expect(logDimensionlessJerk(minimumJerkSpeed(10_000), 10_000)).toBeCloseTo(-Math.log(exact), 3);
  });

  it('gets worse with a ripple of a tenth of its peak at 8 Hz, and worse still with a movement in two halves', () => {
    const clean = minimumJerkSpeed(100);
    const ripple = clean.map((v, i) => v + 0.1 * 1.875 * Math.sin(2 * Math.PI * 8 * (i / 100)));
    const halves = Float64Array.of(...clean, ...clean);
    const of = (speed: Float64Array): number => spectralArcLength(speed, 100);
    expect(of(clean)).toBeGreaterThan(of(ripple));
    expect(of(ripple)).toBeGreaterThan(of(halves));
  });
});

describe('the transform', () => {
  it('agrees with fft.js', () => {
    fc.assert(
      fc.property(
        fc.array(fc.double({ min: -1e3, max: 1e3, noNaN: true }), { minLength: 1, maxLength: 64 }),
        (list) => {
          const theirs = new FFT(64);
          const out = theirs.createComplexArray();
          theirs.realTransform(out, [...list, ...Array.from({ length: 64 - list.length }, () => 0)]);
          const ours = magnitudes(Float64Array.from(list), 64);
          for (let k = 0; k <= 32; k++)
            expect(ours[k]).toBeCloseTo(Math.hypot(out[2 * k] as number, out[2 * k + 1] as number), 6);
        },
      ),
    );
  });
});

describe('the low-pass', () => {
  it('has the coefficients of scipy.signal.butter and of fili at 50 Hz of 1 kHz', () => {
    // scipy.signal.butter(2, 50, fs=1000): b = 0.020083365564 (1, 2, 1), a = 1, -1.561018075801, 0.641351538058.
    const { b, a } = butterworth(50, 1000);
    expect(b[0]).toBeCloseTo(0.020083365564, 12);
    expect(b[1]).toBeCloseTo(0.040166731128, 12);
    expect(a[1]).toBeCloseTo(-1.561018075801, 12);
    expect(a[2]).toBeCloseTo(0.641351538058, 12);
    const [section] = new CalcCascades().lowpass({ order: 1, characteristic: 'butterworth', Fs: 1000, Fc: 50 });
    expect(a[1]).toBeCloseTo(section?.a[0] ?? Number.NaN, 9);
    expect(a[2]).toBeCloseTo(section?.a[1] ?? Number.NaN, 9);
  });

  it('shifts nothing in time, keeps what is slow and halves what is at its cutoff', () => {
    const rateHz = 1000;
    const wave = (hz: number): Float64Array =>
      Float64Array.from({ length: 4000 }, (_, i) => Math.cos((2 * Math.PI * hz * (i - 2000)) / rateHz));
    const slow = wave(1);
    zeroPhase(slow, butterworth(50, rateHz), 300);
    expect(slow[2000]).toBeCloseTo(1, 5);
    const there = wave(50);
    zeroPhase(there, butterworth(50, rateHz), 300);
    // 3.01 dB down on each of the two ways: a half.
    expect(there[2000]).toBeCloseTo(0.5, 3);
    expect(there[2005]).toBeCloseTo(0, 3);
  });
});

describe('minimum jerk', () => {
  it('has a peak speed of 15/8 and a peak acceleration of 10/sqrt 3 (Flash & Hogan 1985)', () => {
    const way = blend(0, 0, 1, 0, 1);
    expect(way.speed(0.5)).toBeCloseTo(1.875, 12);
    // At u = (3 - sqrt 3) / 6; the derivative of speed there, by central difference.
    const u = (3 - Math.sqrt(3)) / 6;
    expect((way.speed(u + 1e-5) - way.speed(u - 1e-5)) / 2e-5).toBeCloseTo(10 / Math.sqrt(3), 6);
    // s(1/4) = 10/64 - 15/256 + 6/1024 = 0.103515625
    expect(way.at(0.25)).toBeCloseTo(0.103515625, 12);
  });

  it('meets place and speed at both ends, whatever they are', () => {
    const number = fc.double({ min: -10, max: 10, noNaN: true });
    fc.assert(
      fc.property(number, number, number, number, fc.double({ min: 0.1, max: 5, noNaN: true }), (x0, v0, x1, v1, T) => {
        const way = blend(x0, v0, x1, v1, T);
        expect(way.at(0)).toBeCloseTo(x0, 9);
        expect(way.at(T)).toBeCloseTo(x1, 7);
        expect(way.speed(0)).toBeCloseTo(v0, 9);
        expect(way.speed(T)).toBeCloseTo(v1, 7);
      }),
    );
  });
});

describe('dynamic time warping', () => {
  it('gives the cost and the path of a table filled in by hand', () => {
    // a = 1 2 3, b = 1 2 2 3: the doubled 2 is paired twice, at no cost (H. Sakoe, S. Chiba 1978, by hand).
    const found = warp(Float64Array.of(1, 2, 3), Float64Array.of(1, 2, 2, 3), 1);
    expect(found.cost).toBe(0);
    expect([...found.path]).toEqual([0, 0, 1, 1, 1, 2, 2, 3]);
    // a = 1 3 4 9, b = 1 3 7 8 9. Cumulative table, rows a, columns b:
    //   0  2  8 15 23 /  2  0  4  9 15 /  5  1  3  7 12 / 13  7  3  4  4
    expect(warp(Float64Array.of(1, 3, 4, 9), Float64Array.of(1, 3, 7, 8, 9), 1).cost).toBe(4);
  });

  it('costs nothing between a series and itself played at another speed', () => {
    const series = fc.array(fc.integer({ min: -9, max: 9 }), { minLength: 2, maxLength: 20 });
    fc.assert(
      fc.property(series, fc.integer({ min: 1, max: 4 }), (values, times) => {
        const slow = values.flatMap((value) => Array.from({ length: times }, () => value));
        expect(warp(Float64Array.from(values), Float64Array.from(slow), 1).cost).toBe(0);
      }),
    );
  });
});
