import { random } from '../sim/random.ts';
import type { Polynomial } from './least-squares.ts';

/**
 * How far a fitted map may be from the truth, its own choice of curve included.
 *
 * The truth is taken as a line with a smooth deviation of unknown size, read with scatter of unknown size; what the points
 * say of both sizes is weighed with what is known of pots and protractors beforehand, and the band is read off curves drawn
 * from what is then believed. A band of one chosen curve alone would forget that the choice may be wrong: with few points a
 * bend that is there is often not believed. Bands of this kind hold their share across the curve with the bias counted in
 * (G. Wahba, "Bayesian 'Confidence Intervals' for the Cross-validated Smoothing Spline", J. R. Statist. Soc. B 45 (1983)
 * 133-150); for sizes known a little beforehand, half-t distributions (A. Gelman, "Prior distributions for variance
 * parameters in hierarchical models", Bayesian Analysis 1 (2006) 515-534).
 */
export interface ErrorOptions {
  /** Spread in y that each point has anyhow. */
  readonly noise: number;
  /** What points of this kind usually scatter by, before any is seen, in y. */
  readonly usualScatter: number;
}

/** Scatter of angles from a protractor and a hand: a degree either way, 1 / sqrt(3), at worst (common practice, no source). */
export const PROTRACTOR_DEG = 0.5;
/** Scatter of a joint that is set by eye to look like another one (common practice, no source). */
export const BY_EYE_DEG = 1;

const CONFIDENCE = 0.95;
/** Degrees of freedom of the scatter's half-t: twice the usual is nothing odd, ten times the usual takes many points to be believed. */
const SCATTER_DOF = 4;
/** Pots bend by about this share of the travel, give or take much (data sheets say 0.1 to 2 %; common practice, no source). */
const USUAL_BEND = 0.01;
const BEND_DOF = 1;
/**
 * Variance of each term over that of the one before, from the fourth degree on; the second and third are as likely. A pot off
 * centre by a little deviates as the sine and cosine of its angle: over 240 degrees their Legendre coefficients of degree 2 to
 * 5 are as 0.47, 0.18, 0.050 and 0.011 (sqrt(2 n + 1) j_n(120 degrees), by hand), which is 0.08 and 0.05 in variance. A
 * loaded divider's square and cube are alike, and its further terms fall off faster.
 */
const FADES = 0.06;
const FADES_FROM = 3;

/** Sizes that are weighed, in even steps of their logarithm. */
const SCATTER_LEAST = 1e-3;
const SCATTER_MOST = 1e2;
const SCATTERS = 51;
const BEND_LEAST = 1e-5;
const BEND_MOST = 1e-1;
const BENDS = 31;

/** The same curves for every map: a report says the same each time it is made. */
const SEED = 1;
/** Curves that are drawn: the 95th of a hundred is then within a half of its place. */
const CURVES = 2000;
/** Places along a map where a curve is compared with it: five to each half wave of the highest degree. */
const PLACES = 26;

/** One pair of sizes, and how far it is believed. */
interface Belief {
  readonly scatter: number;
  /** Variance of the term of each degree, relative to nothing: y squared. */
  readonly bends: readonly number[];
  weight: number;
}

/**
 * @param all the points' fits of degree 0, 1, 2 ... as least squares has them
 * @param value the map
 * @returns what the map is nowhere between `from` and `to` off by more than, with 95 % confidence, in y
 */
export function errorOfMap(
  all: readonly Polynomial[],
  value: (x: number) => number,
  from: number,
  to: number,
  options: ErrorOptions,
): number {
  const beliefs = weighed(all, Math.abs((all[1] as Polynomial).slope(from)) * (to - from), options);
  const total = beliefs.reduce((sum, { weight }) => sum + weight, 0);
  const places = Array.from({ length: PLACES }, (_, i) => from + ((to - from) * i) / (PLACES - 1));
  const terms = Float64Array.from(places.flatMap((x) => all.map(({ last }) => last.value(x))));
  const map = Float64Array.from(places, value);
  const drawn = new Float64Array(all.length);
  const chance = random(SEED, 0);
  const off = new Float64Array(CURVES);
  let at = 0;
  let passed = 0;
  for (let curve = 0; curve < CURVES; curve++) {
    // Evenly through all that is believed, rather than by lot: fewer curves then do.
    const wanted = ((curve + 0.5) / CURVES) * total;
    while (at < beliefs.length - 1 && passed + (beliefs[at] as Belief).weight < wanted)
      passed += (beliefs[at++] as Belief).weight;
    const { scatter, bends } = beliefs[at] as Belief;
    for (const [degree, { last }] of all.entries()) {
      const kept = degree < 2 ? 1 : (bends[degree] as number) / ((bends[degree] as number) + scatter * scatter);
      drawn[degree] = kept * last.coefficient + scatter * Math.sqrt(kept) * chance.normal();
    }
    let most = 0;
    for (let p = 0; p < PLACES; p++) {
      let away = -(map[p] as number);
      for (let k = 0; k < drawn.length; k++) away += (terms[p * drawn.length + k] as number) * (drawn[k] as number);
      most = Math.max(most, Math.abs(away));
    }
    off[curve] = most;
  }
  return off.sort()[CONFIDENCE * CURVES] as number;
}

/** In coordinates of orthonormal terms each size's likelihood is a product of normal densities. */
function weighed(all: readonly Polynomial[], span: number, { noise, usualScatter }: ErrorOptions): readonly Belief[] {
  const whole = all.at(-1) as Polynomial;
  const beliefs: Belief[] = [];
  const logs: number[] = [];
  for (let s = 0; s < SCATTERS; s++) {
    const own = SCATTER_LEAST * (SCATTER_MOST / SCATTER_LEAST) ** (s / (SCATTERS - 1));
    const scatter = Math.hypot(own, noise);
    const variance = scatter * scatter;
    const rest = -whole.dof * Math.log(scatter) - whole.squares / (2 * variance);
    for (let b = 0; b < BENDS; b++) {
      const bend = BEND_LEAST * (BEND_MOST / BEND_LEAST) ** (b / (BENDS - 1));
      const bends = all.map(({ n, degree }) => n * (bend * span) ** 2 * FADES ** Math.max(0, degree - FADES_FROM));
      let log = rest + halfT(own / usualScatter, SCATTER_DOF) + halfT(bend / USUAL_BEND, BEND_DOF);
      for (let degree = 2; degree < all.length; degree++) {
        const sum = variance + (bends[degree] as number);
        log -= 0.5 * Math.log(sum) + (all[degree] as Polynomial).last.coefficient ** 2 / (2 * sum);
      }
      logs.push(log);
      beliefs.push({ scatter, bends, weight: 0 });
    }
  }
  const most = Math.max(...logs);
  for (const [i, belief] of beliefs.entries()) belief.weight = Math.exp((logs[i] as number) - most);
  return beliefs;
}

/** Logarithm of the density of a half-t, over even steps of the logarithm of its variable. */
function halfT(t: number, dof: number): number {
  return Math.log(t) - ((dof + 1) / 2) * Math.log1p((t * t) / dof);
}
