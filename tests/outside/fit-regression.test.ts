import { describe, expect, it } from 'vitest';
import { fisherTail, studentT } from '../../src/fit/distributions.ts';
import { type Polynomial, polynomials } from '../../src/fit/least-squares.ts';
import { fitMap } from '../../src/fit/map-fit.ts';
import { effectiveBits, noiseOf, QUANTISATION_COUNTS } from '../../src/fit/noise.ts';
import { theilSen } from '../../src/fit/theil-sen.ts';
import { suspect, wrongPoint } from '../../src/fit/wrong-point.ts';
import { random } from '../../src/sim/random.ts';

const numbers = (text: string): number[] => text.trim().split(/\s+/).map(Number);
const line = (x: readonly number[], y: readonly number[]): Polynomial => polynomials(x, y, 1)[1] as Polynomial;

/** NIST, Statistical Reference Datasets, linear regression: Norris. */
const NORRIS = {
  x: numbers(`0.2 337.4 118.2 884.6 10.1 226.5 666.3 996.3 448.6 777.0 558.2 0.4 0.6 775.5 666.9 338.0 447.5 11.6 556.0
    228.1 995.8 887.6 120.2 0.3 0.3 556.8 339.1 887.2 999.0 779.0 11.1 118.3 229.2 669.1 448.9 0.5`),
  y: numbers(`0.1 338.8 118.1 888.0 9.2 228.1 668.5 998.5 449.1 778.9 559.2 0.3 0.1 778.1 668.8 339.3 448.9 10.8 557.7
    228.3 998.0 888.8 119.6 0.3 0.6 557.6 339.3 888.0 998.5 778.9 10.2 117.6 228.9 668.4 449.2 0.2`),
};

/** Twelve significant digits: what double precision leaves of the fifteen certified ones. */
const digits = (value: number, certified: number): void => {
  expect(Math.abs(value / certified - 1)).toBeLessThan(5e-12);
};

describe('The straight fit', () => {
  it('gives the certified digits of NIST StRD Norris', () => {
    const fit = line(NORRIS.x, NORRIS.y);
    expect(fit.n).toBe(36);
    digits(fit.value(0), -0.262323073774029);
    digits(fit.slope(0), 1.00211681802045);
    digits(fit.sigma, 0.884796396144373);
    digits(fit.squares, 26.6173985294224);
    digits(fit.sigma * Math.sqrt(fit.leverage(0)), 0.232818234301152);
    digits(fit.sigma * Math.sqrt(fit.slopeLeverage(0)), 0.429796848199937e-3);
  });

  it('gives the certified digits of NIST StRD Pontius, a square with counts in millions', () => {
    const x = Array.from({ length: 40 }, (_, i) => 150_000 * ((i % 20) + 1));
    const y = numbers(`.11019 .21956 .32949 .43899 .54803 .65694 .76562 .87487 .98292 1.09146 1.20001 1.30822 1.41599
      1.52399 1.63194 1.73947 1.84646 1.95392 2.06128 2.16844 .11052 .22018 .32939 .43886 .54798 .65739 .76596 .87474
      .98300 1.09150 1.20004 1.30818 1.41613 1.52408 1.63159 1.73965 1.84696 1.95445 2.06177 2.16829`);
    const fit = polynomials(x, y, 2)[2] as Polynomial;
    const near = (value: number, certified: number): void => expect(Math.abs(value / certified - 1)).toBeLessThan(1e-9);
    near(fit.value(0), 0.673565789473684e-3);
    near(fit.slope(0), 0.732059160401e-6);
    // The second derivative is twice the coefficient of the square.
    near((fit.slope(1e6) - fit.slope(0)) / 2e6, -0.316081871345029e-14);
    near(fit.squares, 0.155761768796992e-5);
    near(fit.sigma * Math.sqrt(fit.leverage(0)), 0.107938612033077e-3);
    near(fit.sigma * Math.sqrt(fit.slopeLeverage(0)), 0.157817399981659e-9);
  });

  it('gives the certified coefficients of NIST StRD Wampler1, a polynomial of the fifth degree without scatter', () => {
    // y = 1 + x + x^2 + x^3 + x^4 + x^5 at x = 0 to 20; every certified coefficient is 1, the residuals are 0.
    const x = Array.from({ length: 21 }, (_, i) => i);
    const sum = (at: number): number => [0, 1, 2, 3, 4, 5].reduce((total, k) => total + at ** k, 0);
    const fit = polynomials(x, x.map(sum), 5)[5] as Polynomial;
    // Between the points and beyond them only the right coefficients agree.
    for (const at of [-10, -2.5, 0.5, 7.3, 19.9, 30]) expect(Math.abs(fit.value(at) / sum(at) - 1)).toBeLessThan(1e-8);
    expect(fit.sigma / sum(20)).toBeLessThan(1e-14);
  });

  /** F. J. Anscombe, "Graphs in Statistical Analysis", Am. Statistician 27 (1973) 17-21. */
  const ANSCOMBE = {
    x: [10, 8, 13, 9, 11, 14, 6, 4, 12, 7, 5],
    y: [
      [8.04, 6.95, 7.58, 8.81, 8.33, 9.96, 7.24, 4.26, 10.84, 4.82, 5.68],
      [9.14, 8.14, 8.74, 8.77, 9.26, 8.1, 6.13, 3.1, 9.13, 7.26, 4.74],
      [7.46, 6.77, 12.74, 7.11, 7.81, 8.84, 6.08, 5.39, 8.15, 6.42, 5.73],
    ],
  };

  it('cannot tell three of Anscombe’s sets apart by slope and offset', () => {
    for (const y of ANSCOMBE.y) {
      const fit = line(ANSCOMBE.x, y);
      expect(fit.slope(0)).toBeCloseTo(0.5, 3);
      expect(fit.value(0)).toBeCloseTo(3.0, 2);
    }
  });

  it('tells them apart by their residuals: scatter, a bend, and one wrong point', () => {
    const [scatter, bend, wrong] = ANSCOMBE.y.map((y) => {
      const fit = fitMap(ANSCOMBE.x, y, { noise: 0, usualScatter: 0.5, curves: true });
      if ('why' in fit) return fit.why;
      return `${fit.curve}${fit.wrong === null ? '' : `, ${ANSCOMBE.x[fit.wrong.index]} is wrong`}`;
    });
    expect(scatter).toBe('straight');
    // Anscombe's second set is a parabola with its top inside the points: no pot.
    expect(bend).toBe('turns back');
    expect(wrong).toBe('straight, 13 is wrong');
  });
});

describe('A wrong point', () => {
  /**
   * J. D. Forbes' boiling points, in S. Weisberg, Applied Linear Regression (Wiley), from the MASS package of R; x in
   * degrees Fahrenheit, y = 100 log10 of inches of mercury. Weisberg's outlier test: case 12, e = 1.36, sigma 0.379,
   * leverage 0.0639, t = 12.40 (from memory).
   */
  const x = numbers(
    '194.5 194.3 197.9 198.4 199.4 199.9 200.9 201.1 201.4 201.3 203.6 204.6 209.5 208.6 210.7 211.9 212.2',
  );
  const y = numbers(
    '20.79 20.79 22.40 22.67 23.15 23.35 23.89 23.99 24.02 24.01 25.14 26.57 28.49 27.76 29.04 29.88 30.06',
  ).map((inches) => 100 * Math.log10(inches));

  it('is found as Weisberg finds case 12 of Forbes’ data', () => {
    const fit = line(x, y);
    expect(fit.slope(0)).toBeCloseTo(0.8955, 3);
    expect(fit.value(0)).toBeCloseTo(-42.14, 1);
    expect(fit.sigma).toBeCloseTo(0.379, 3);
    expect(fit.residuals[11]).toBeCloseTo(1.36, 2);
    expect(fit.leverage(204.6)).toBeCloseTo(0.0639, 4);
    const found = wrongPoint(fit, x, 0);
    expect(found?.index).toBe(11);
    expect(found?.sigmas).toBeCloseTo(12.4, 1);
  });

  it('is what its distance from the line through the others says, by doing it the long way', () => {
    const at = 11;
    const rest = x.filter((_, i) => i !== at);
    const others = line(
      rest,
      y.filter((_, i) => i !== at),
    );
    const away = (y[at] as number) - others.value(x[at] as number);
    const error = others.sigma * Math.sqrt(1 + others.leverage(x[at] as number));
    const found = suspect(line(x, y), x, 0);
    expect(found?.index).toBe(at);
    expect(found?.away).toBeCloseTo(away, 9);
    expect(found?.sigmas).toBeCloseTo(Math.abs(away) / error, 9);
  });
});

describe('The robust line', () => {
  it('is the Theil-Sen line of NIST’s Norris data that SciPy and ml-regression-theil-sen give', () => {
    // scipy.stats.theilslopes(method='joint') 1.17 and ml-regression-theil-sen: slope and median residual.
    const { slope, offset } = theilSen(NORRIS.x, NORRIS.y);
    expect(slope).toBeCloseTo(1.0021968365553604, 12);
    expect(offset).toBeCloseTo(-0.3010984182776848, 12);
  });
});

describe('The robust line of a textbook', () => {
  /**
   * M. Hollander, D. A. Wolfe, E. Chicken, Nonparametric Statistical Methods, 3rd ed. (Wiley, 2014), example 9.1, the effect
   * of cloud seeding on rainfall; data as the book's R package NSM3 has them (`theil(example = TRUE)`).
   */
  const years = [1, 2, 3, 4, 5];
  const ratio = [1.26, 1.27, 1.12, 1.16, 1.03];

  it('has the middle of its ten slopes', () => {
    // Slopes in order: -0.15 -0.13 -0.08 -0.07 -0.0575 | -0.055 -0.045 -0.0333 0.01 0.04; the book rounds to -0.056 (from memory).
    // What is then left: 1.28875 1.31125 1.31625 1.3825 1.385.
    const { slope, offset } = theilSen(years, ratio);
    expect(slope).toBeCloseTo(-0.05625, 12);
    expect(offset).toBeCloseTo(1.31625, 12);
  });

  it('does not move far when one year is misread, and the least-squares line does', () => {
    const misread = ratio.map((each, i) => (i === 4 ? 10.3 : each));
    expect(Math.abs(theilSen(years, misread).slope - -0.05625)).toBeLessThan(0.1);
    expect(line(years, misread).slope(0)).toBeGreaterThan(1.5);
  });
});

describe('Intervals', () => {
  // Student's t and Fisher's F as in every printed table, such as NIST/SEMATECH e-Handbook of Statistical Methods, 1.3.6.7.
  it.each([
    [1, 12.706],
    [2, 4.303],
    [3, 3.182],
    [5, 2.571],
    [10, 2.228],
    [30, 2.042],
    [100, 1.984],
  ])('have the t of the tables for %d degrees of freedom', (dof, t) => {
    expect(studentT(0.05, dof)).toBeCloseTo(t, 3);
  });

  it.each([
    [4.965, 1, 10],
    [4.103, 2, 10],
    [19.0, 2, 2],
    [3.326, 5, 10],
  ])('have the F of the tables: %d is exceeded once in twenty (%d, %d)', (f, d1, d2) => {
    expect(fisherTail(f, d1, d2)).toBeCloseTo(0.05, 3);
  });
});

describe('Noise', () => {
  it('of a converter that counts whole steps is LSB / sqrt(12)', () => {
    // 12 bits at 3.3 V: LSB 0.806 mV, noise 0.233 mV (Analog Devices MT-001).
    const lsb = 3300 / 4096;
    expect(lsb).toBeCloseTo(0.806, 3);
    expect(lsb * QUANTISATION_COUNTS).toBeCloseTo(0.233, 3);
    // 300 degrees over 0..1023: 0.08457 degrees rms (by hand: 300 / 1024 / sqrt(12)).
    expect((300 / 1024) * QUANTISATION_COUNTS).toBeCloseTo(0.08457, 5);
    // Rounding values that are spread evenly leaves just that.
    const chance = random(3, 0);
    const errors = Array.from({ length: 40_000 }, () => {
      const value = chance.between(0, 4095);
      return Math.round(value) - value;
    });
    expect(noiseOf(errors).counts).toBeCloseTo(QUANTISATION_COUNTS, 2);
  });

  it('of an ideal converter leaves it its own bits', () => {
    for (const bits of [8, 10, 12, 14, 16]) expect(effectiveBits(2 ** bits, QUANTISATION_COUNTS)).toBeCloseTo(bits, 12);
  });
});
