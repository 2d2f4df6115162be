import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { fitMap, type MapFit } from '../../src/fit/map-fit.ts';
import { random } from '../../src/sim/random.ts';

function mapOf(x: readonly number[], y: readonly number[], noise = 0): MapFit {
  const fit = fitMap(x, y, { noise, usualScatter: 0.5, curves: true });
  if ('why' in fit) throw new Error(fit.why);
  return fit;
}

const steps = (from: number, to: number, n: number): number[] =>
  Array.from({ length: n }, (_, i) => from + ((to - from) * i) / (n - 1));

describe('A map of measured points', () => {
  it.each([
    // What so few points leave open: chance makes five agree now and then, nine hardly ever.
    [5, 0.1],
    [9, 0.02],
  ])('is the straight line through %d exact points, and claims no more error than %d degrees', (n, error) => {
    const x = steps(100, 900, n);
    const fit = mapOf(
      x,
      x.map((count) => (count - 500) / 4),
    );
    expect(fit.curve).toBe('straight');
    expect(fit.points.map(([, deg]) => deg)).toEqual([-100, 100]);
    expect(fit.slope.is).toBeCloseTo(0.25, 12);
    expect(fit.error95).toBeLessThan(error);
  });

  it('states no error for two points: no one knows it', () => {
    const fit = mapOf([100, 900], [-90, 90]);
    expect([fit.error95, fit.sigma, fit.slope.error95]).toEqual([null, null, null]);
  });

  it.each([
    ['few', [500], [0]],
    ['coincident', [500, 500, 500], [0, 10, 20]],
    ['flat', [100, 500, 900], [30, 30, 30]],
    // By hand: a line through these has slope 0.
    ['flat', [0, 1, 2, 3], [0, 1, 1, 0]],
  ] as const)('is refused where points are %s', (why, x, y) => {
    expect(fitMap(x, y, { noise: 0, usualScatter: 0.5, curves: true })).toMatchObject({ why });
  });

  it('is refused where points turn back, with the place', () => {
    // A parabola with its top at 700.
    const x = steps(100, 900, 9);
    const y = x.map((count) => -((count - 700) ** 2) / 1000);
    const fit = fitMap(x, y, { noise: 0, usualScatter: 0.5, curves: true });
    if (!('why' in fit) || fit.why !== 'turns back') throw new Error('it was taken for a map');
    expect(fit.at[1]).toBeGreaterThan(700);
  });

  it('is refused where two points are wrong, because nobody can say which are right', () => {
    const x = steps(0, 1000, 12);
    const y = x.map((count, i) => count / 4 + (i === 3 ? 60 : i === 9 ? -12 : (i % 2) * 0.1));
    expect(fitMap(x, y, { noise: 0.05, usualScatter: 0.5, curves: true })).toMatchObject({ why: 'wrong points' });
  });

  /** A 10k pot into 100k, ratio = a / (1 + a (1 - a) / 10): 1.45 % off at worst (by hand, from the divider). */
  const loaded = (a: number): number => a / (1 + (a * (1 - a)) / 10);

  it('follows a loaded divider with a curve, and a good deal closer than a line can', () => {
    const angle = steps(-135, 135, 11);
    const counts = angle.map((deg) => 4095 * loaded((deg + 150) / 300));
    const fit = mapOf(counts, angle, 0.02);
    expect(fit.curve).toBe('monotone');
    for (const deg of steps(-135, 135, 55)) {
      expect(Math.abs(fit.value(4095 * loaded((deg + 150) / 300)) - deg)).toBeLessThan(0.15);
    }
  });

  it('recovers any planted monotone map of bounded curvature', () => {
    const planted = fc.record({
      slope: fc.double({ min: 0.05, max: 2, noNaN: true }),
      bend: fc.double({ min: -0.6, max: 0.6, noNaN: true }),
      s: fc.double({ min: -0.2, max: 0.2, noNaN: true }),
      rises: fc.boolean(),
      n: fc.integer({ min: 9, max: 25 }),
      from: fc.integer({ min: 0, max: 400 }),
    });
    fc.assert(
      fc.property(planted, ({ slope, bend, s, rises, n, from }) => {
        // Over u in 0..1 the slope is 1 + bend (u - 1/2) + 3 s (u - 1/2)^2, at least 1 - 0.3 - 0.15: it never turns.
        const truth = (x: number): number => {
          const u = (x - from) / 600 - 0.5;
          return (rises ? 1 : -1) * slope * 600 * (u + (bend * u * u) / 2 + s * u ** 3);
        };
        const x = steps(from, from + 600, n);
        const fit = mapOf(x, x.map(truth));
        const span = slope * 600;
        for (const at of steps(from, from + 600, 50)) {
          expect(Math.abs(fit.value(at) - truth(at)) / span).toBeLessThan(0.002);
        }
      }),
    );
  });

  it('names a planted outlier that stands out by five sigma, among six points or more', () => {
    const planted = fc.record({
      n: fc.integer({ min: 6, max: 20 }),
      seed: fc.nat(),
      at: fc.nat(),
      sigmas: fc.double({ min: 5.01, max: 50, noNaN: true }),
      up: fc.boolean(),
    });
    fc.assert(
      fc.property(planted, ({ n, seed, at, sigmas, up }) => {
        const chance = random(seed, 1);
        const index = at % n;
        const x = steps(100, 900, n).map((count) => count + chance.between(-20, 20));
        const y = x.map((count) => count / 4 + chance.between(-1, 1));
        // Five sigma of what the others, by themselves, say of this place.
        const others = x.map((_, i) => i).filter((i) => i !== index);
        const line = lineBy(
          others.map((i) => x[i] as number),
          others.map((i) => y[i] as number),
        );
        const error = line.sigma * Math.sqrt(1 + line.leverage(x[index] as number));
        y[index] = line.value(x[index] as number) + (up ? 1 : -1) * sigmas * error;
        const fit = fitMap(x, y, { noise: 0, usualScatter: 0.5, curves: false });
        expect('why' in fit ? fit.why : fit.wrong?.index).toBe(index);
      }),
    );
  });
});

/** Least squares by the schoolbook, for judging the other way of computing it. */
function lineBy(x: readonly number[], y: readonly number[]) {
  const n = x.length;
  const mean = (of: readonly number[]): number => of.reduce((sum, each) => sum + each, 0) / n;
  const [mx, my] = [mean(x), mean(y)];
  const sxx = x.reduce((sum, each) => sum + (each - mx) ** 2, 0);
  const slope = x.reduce((sum, each, i) => sum + (each - mx) * ((y[i] as number) - my), 0) / sxx;
  const value = (at: number): number => my + slope * (at - mx);
  const squares = x.reduce((sum, each, i) => sum + ((y[i] as number) - value(each)) ** 2, 0);
  return {
    value,
    sigma: Math.sqrt(squares / (n - 2)),
    leverage: (at: number): number => 1 / n + (at - mx) ** 2 / sxx,
  };
}
