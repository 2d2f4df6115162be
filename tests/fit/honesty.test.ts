import { describe, expect, it } from 'vitest';
import { fitMap } from '../../src/fit/map-fit.ts';
import { random } from '../../src/sim/random.ts';

/**
 * What an operator measures of a poor pot: a divider with a load of so many times its own resistance, off a line by a share
 * of the range in a shape of its own each time, half a degree of play in its coupling, and a protractor read to a degree
 * either way.
 */
function measured(seed: number, points: number, load: number, bent: number) {
  const chance = random(seed, 0);
  const phase = chance.between(0, 2 * Math.PI);
  const counts = (deg: number): number => {
    const a = (deg + 150) / 300;
    const shape = Math.sin(Math.PI * a) * Math.cos(phase) + Math.sin(2 * Math.PI * a) * Math.sin(phase);
    return 4095 * (a / (1 + (a * (1 - a)) / load) + bent * shape);
  };
  const known: number[] = [];
  const read: number[] = [];
  for (let i = 0; i < points; i++) {
    const deg = -120 + (240 * i) / (points - 1);
    const play = chance.uniform() < 0.5 ? -0.25 : 0.25;
    known.push(deg);
    read.push(Math.round(counts(deg + chance.between(-1, 1) + play)));
  }
  return { counts, known, read };
}

const SEEDS = 200;

describe('The stated 95 % error', () => {
  it.each([
    // The case that was promised: 2 % off a line.
    [7, 20, 0.02],
    [9, 20, 0.02],
    [13, 20, 0.02],
    // Bends that are there and too small to be believed from so few points, and one of a heavy load alone.
    [7, 10, 0],
    [9, 100, 0.005],
    [9, 20, 0.01],
    [13, 20, 0],
  ])(
    'holds the truth in at least 180 of 200 sets of %d points, loaded %d-fold, %d off a line, and is not wide by more than half',
    (points, load, bent) => {
      const errors: number[] = [];
      const stated: number[] = [];
      let inside = 0;
      for (let seed = 1; seed <= SEEDS; seed++) {
        const { counts, known, read } = measured(seed, points, load, bent);
        const fit = fitMap(read, known, { noise: 0.02, usualScatter: 0.5, curves: true });
        // Nothing stated counts as a miss.
        if ('why' in fit || fit.error95 === null) continue;
        const low = fit.points[0]?.[0] ?? Number.NaN;
        const high = fit.points.at(-1)?.[0] ?? Number.NaN;
        let worst = 0;
        for (let deg = -121; deg <= 121; deg++) {
          const at = counts(deg);
          if (at >= low && at <= high) worst = Math.max(worst, Math.abs(fit.value(at) - deg));
        }
        errors.push(worst);
        stated.push(fit.error95);
        if (worst <= fit.error95) inside++;
      }
      expect(inside).toBeGreaterThanOrEqual(180);
      // A perfect statement would be what the error stays under 95 times in 100.
      const needed = errors.toSorted((a, b) => a - b)[Math.floor(0.95 * errors.length)] as number;
      const typical = stated.toSorted((a, b) => a - b)[stated.length >> 1] as number;
      expect(typical).toBeLessThan(1.5 * needed);
    },
  );
});
