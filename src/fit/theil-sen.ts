import { medianOf } from './dwells.ts';

/** A straight line that up to 29 % of wrong points cannot drag along. */
export interface RobustLine {
  readonly slope: number;
  readonly offset: number;
}

/** Pairs grow as the square of the points; of more points than these, every so many are taken. */
const POINTS_MAX = 300;

/**
 * Median of the slopes between all pairs of points, through the median of what is then left of y (H. Theil, Indagationes
 * Math. 12 (1950) 85-91; P. K. Sen, J. Am. Stat. Assoc. 63 (1968) 1379-1389).
 * @param x n values, at least two different
 */
export function theilSen(x: readonly number[], y: readonly number[]): RobustLine {
  const stride = Math.max(1, Math.ceil(x.length / POINTS_MAX));
  const picked = x.map((_, i) => i).filter((i) => i % stride === 0);
  const slopes: number[] = [];
  for (const [k, i] of picked.entries()) {
    for (const j of picked.slice(k + 1)) {
      const dx = (x[j] as number) - (x[i] as number);
      if (dx !== 0) slopes.push(((y[j] as number) - (y[i] as number)) / dx);
    }
  }
  const slope = medianOf(slopes);
  return { slope, offset: medianOf(x.map((each, i) => (y[i] as number) - slope * each)) };
}

/** Between a normal distribution's quartiles, in its standard deviations. */
const QUARTILES_SIGMAS = 1.349;
/** A bent pot puts its ends two or three of these from a line; a misread angle many more. */
const APART_SIGMAS = 8;
/** Quartiles of fewer are too easily near each other by chance. */
const POINTS_MIN = 9;

/**
 * Points far from where most of the others run: several wrong ones hide each other from any test of one at a time.
 * @param noise spread in y that every point has anyhow
 */
export function standingApart(x: readonly number[], y: readonly number[], noise: number): readonly number[] {
  if (x.length < POINTS_MIN) return [];
  const { slope } = theilSen(x, y);
  const left = x.map((each, i) => (y[i] as number) - slope * each);
  const sorted = left.toSorted((a, b) => a - b);
  // Quartiles rather than a middle: a servo measured both ways has two.
  const [low, high] = [0.25, 0.75].map((share) => sorted[Math.round(share * (sorted.length - 1))]) as [number, number];
  const most = APART_SIGMAS * Math.max((high - low) / QUARTILES_SIGMAS, noise);
  return left.flatMap((each, i) => (each < low - most || each > high + most ? [i] : []));
}
