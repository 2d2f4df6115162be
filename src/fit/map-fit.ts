import { curveThrough } from './curves.ts';
import { fisherTail, studentT } from './distributions.ts';
import { type Polynomial, polynomials } from './least-squares.ts';
import { errorOfMap } from './map-error.ts';
import { standingApart } from './theil-sen.ts';
import { type Suspect, suspect, wrongPoint } from './wrong-point.ts';

/** A joint's map from measured pairs, with its error: x is known well (counts, microseconds), y with a reading error. */
export interface MapFit {
  readonly curve: 'straight' | 'monotone';
  /** What the profile gets, rising in x: the ends of a straight line, or knots along a curve. */
  readonly points: readonly (readonly [number, number])[];
  /** Degree of the curve that the knots are taken from; 1: straight. */
  readonly degree: number;
  /** Points used. */
  readonly n: number;
  /** The one point left out because it stands out; null: none. */
  readonly wrong: Suspect | null;
  /** The point that agrees least of those used, by its index among them; null: not worth a word. */
  readonly doubtful: Suspect | null;
  /** y less fitted y of every point given, the wrong one included. */
  readonly residuals: Float64Array;
  /** Of the points used. */
  readonly rms: number;
  readonly worst: number;
  /** Spread of a point about the curve; null: too few points to tell. */
  readonly sigma: number | null;
  /** The map is nowhere between its outer points further from the truth than this, with 95 % confidence; null: unknown. */
  readonly error95: number | null;
  /** Of the straight line through the points used, with the half width of its 95 % interval. */
  readonly slope: Estimate;
  /** Its value in the middle of the points, where slope and offset do not mix. */
  readonly middle: Estimate & { readonly x: number };
  /** Its value at x = 0. */
  readonly offset: Estimate;
  value(x: number): number;
}

export interface Estimate {
  readonly is: number;
  /** Half width of the 95 % interval; null: too few points to tell. */
  readonly error95: number | null;
}

/** Why there is no map. `at` are the x between which the points turn back. */
export type NoMap =
  | { readonly why: 'few'; readonly n: number }
  | { readonly why: 'coincident' }
  | { readonly why: 'flat' }
  | { readonly why: 'turns back'; readonly at: readonly [number, number] }
  /** Two points or more stand out: nobody can say which are right. */
  | { readonly why: 'wrong points'; readonly at: readonly [number, number] };

const TAILS = 0.05;
/**
 * A bend is believed that chance would mimic this often. Lenient on purpose: a bend that is there and not believed is an
 * error of the map, one that is not there and believed costs a little of it.
 */
const BELIEVED = 0.1;
/** Above this, a curve describes the points' scatter rather than the pot. */
const DEGREE_MAX = 5;
/** Points beyond the coefficients that a curve needs before its residuals say anything. */
const SPARE_MIN = 3;
/** Knots along a curve: a monotone cubic through so many differs from it by less than a hundredth of its bend. */
const KNOTS = 13;
/** Where a curve is looked at between its ends. */
const LOOKS = 200;
/** A point that is left in is mentioned from this many standard errors on. */
const MENTION_SIGMAS = 3;

export interface MapFitOptions {
  /** Spread in y that each point has anyhow, from resolution and from noise while held. */
  readonly noise: number;
  /** What points of this kind usually scatter by, before any is seen, in y. */
  readonly usualScatter: number;
  /** False: only a straight line will do (a servo's points are joined by straight lines anyhow). */
  readonly curves: boolean;
}

/**
 * Fits y over x: a straight line, or a smooth monotone curve where a line's residuals are systematic and points enough;
 * leaves out one point that stands out.
 */
export function fitMap(x: readonly number[], y: readonly number[], options: MapFitOptions): MapFit | NoMap {
  if (x.length < 2) return { why: 'few', n: x.length };
  const [low, high] = [Math.min(...x), Math.max(...x)];
  if (!(high > low)) return { why: 'coincident' };
  if (Math.max(...y) === Math.min(...y)) return { why: 'flat' };
  const noise = Math.max(options.noise, EXACT * (Math.max(...y) - Math.min(...y)));

  const first = chosen(x, y, noise, options.curves);
  if ('why' in first) return first;
  const { fit, wrong } = first;
  const kept = x.map((_, i) => i).filter((i) => i !== wrong?.index);
  const keptX = kept.map((i) => x[i] as number);
  const [from, to] = [Math.min(...keptX), Math.max(...keptX)];
  const line = fit.all[1] as Polynomial;
  const { used } = fit;
  const points = used.degree === 1 ? ends(used, from, to) : knots(used, from, to);
  const value = curveThrough(points, used.degree === 1 ? 'straight' : 'monotone');
  const residuals = Float64Array.from(x, (at, i) => (y[i] as number) - value(at));
  const own = kept.map((i) => Math.abs(residuals[i] as number));
  const least = used.dof > 1 ? suspect(used, keptX, noise) : null;
  const t = used.dof > 0 ? studentT(TAILS, used.dof) : null;
  const within = (is: number, leverage: number): Estimate => ({
    is,
    error95: t === null ? null : t * Math.max(used.sigma, noise) * Math.sqrt(leverage),
  });
  const mid = (from + to) / 2;
  const scatter = { noise, usualScatter: options.usualScatter };
  // Where chance may have made a point stand out, it may as well be right.
  const believable = wrong === null || wrong.chance < UNDOUBTED ? [fit.all] : [fit.all, polynomials(x, y, DEGREE_MAX)];
  return {
    curve: used.degree === 1 ? 'straight' : 'monotone',
    points,
    degree: used.degree,
    n: kept.length,
    wrong,
    doubtful: least !== null && least.sigmas >= MENTION_SIGMAS ? least : null,
    residuals,
    rms: Math.sqrt(own.reduce((sum, r) => sum + r * r, 0) / own.length),
    worst: Math.max(...own),
    sigma: used.dof > 0 ? used.sigma : null,
    error95: used.dof > 0 ? Math.max(...believable.map((all) => errorOfMap(all, value, from, to, scatter))) : null,
    slope: within(line.slope(mid), line.slopeLeverage(mid)),
    middle: { x: mid, ...within(line.value(mid), line.leverage(mid)) },
    offset: within(line.value(0), line.leverage(0)),
    value,
  };
}

/** Rounding, as a share of the span of y. */
const EXACT = 1e-9;

interface Fitted {
  readonly all: readonly Polynomial[];
  readonly used: Polynomial;
}

function chosen(
  x: readonly number[],
  y: readonly number[],
  noise: number,
  curves: boolean,
): { readonly fit: Fitted; readonly wrong: Suspect | null } | NoMap {
  const fit = fitted(x, y, curves);
  const line = fit.all[1] as Polynomial;
  for (const asked of fit.used === line ? [line] : [line, fit.used]) {
    const wrong = wrongPoint(asked, x, noise);
    if (wrong === null) continue;
    const without = (_: number, i: number): boolean => i !== wrong.index;
    const rest = x.filter(without);
    if (!(Math.max(...rest) > Math.min(...rest))) continue;
    const again = fitted(rest, y.filter(without), curves);
    // A bend can look like a wrong point to the line: then leaving that point out does not help much.
    if (asked !== fit.used && spread(again.used, noise) > HELPS * spread(fit.used, noise)) continue;
    const second = wrongPoint(again.used, rest, noise);
    if (second !== null && second.chance < BEYOND_CHANCE)
      return { why: 'wrong points', at: [x[wrong.index] as number, rest[second.index] as number] };
    return turning(again, rest) ?? { fit: again, wrong: placed(wrong, again.used, x, y) };
  }
  const [a, b] = standingApart(x, y, noise);
  if (a !== undefined && b !== undefined) return { why: 'wrong points', at: [x[a] as number, x[b] as number] };
  return turning(fit, x) ?? { fit, wrong: null };
}

/** So seldom does scatter alone make a second point stand out; a few points are easily unlucky. */
const BEYOND_CHANCE = 1e-6;

/** A point that chance makes stand out so seldom is wrong beyond doubt. */
const UNDOUBTED = 0.01;

/** Leaving a wrong point out takes the spread down to this share or less. */
const HELPS = 0.7;

function spread(fit: Polynomial, noise: number): number {
  return Math.max(fit.sigma, noise);
}

/** How far off it is, from the map that was chosen without it. */
function placed(wrong: Suspect, used: Polynomial, x: readonly number[], y: readonly number[]): Suspect {
  return { ...wrong, away: (y[wrong.index] as number) - used.value(x[wrong.index] as number) };
}

/** Takes in further terms, one or two at a time (an S has no square), as long as they are believed. */
function fitted(x: readonly number[], y: readonly number[], curves: boolean): Fitted {
  const all = polynomials(x, y, DEGREE_MAX);
  let used = all[1] as Polynomial;
  for (let more = true; curves && more; ) {
    const next = [1, 2]
      .map((step) => all[used.degree + step])
      .find((wider) => wider !== undefined && wider.dof >= SPARE_MIN && believed(used, wider));
    more = next !== undefined;
    used = next ?? used;
  }
  return { all, used };
}

function believed(narrow: Polynomial, wide: Polynomial): boolean {
  const terms = wide.degree - narrow.degree;
  const gain = (narrow.squares - wide.squares) / terms;
  const left = wide.squares / wide.dof;
  // Exact data leaves nothing on either side.
  if (gain <= EXACT * EXACT * narrow.squares) return false;
  return fisherTail(gain / left, terms, wide.dof) < BELIEVED;
}

/** A curve that turns round inside the points, by more than they scatter, is no map. */
function turning({ all, used }: Fitted, x: readonly number[]): NoMap | null {
  const [from, to] = [Math.min(...x), Math.max(...x)];
  const flat = Math.abs((all[1] as Polynomial).slope(from)) * (to - from);
  if (flat === 0) return { why: 'flat' };
  if (used.degree === 1) return null;
  const falls = used.value(to) < used.value(from);
  let reached = used.value(from);
  let back: readonly [number, number] | null = null;
  let most = 0;
  for (let i = 1; i <= LOOKS; i++) {
    const at = from + ((to - from) * i) / LOOKS;
    const value = used.value(at);
    const lost = falls ? value - reached : reached - value;
    if (lost > most) {
      most = lost;
      back = [at - (to - from) / LOOKS, at];
    }
    if (lost < 0) reached = value;
  }
  return back === null ? null : { why: 'turns back', at: back };
}

function ends(line: Polynomial, from: number, to: number): readonly (readonly [number, number])[] {
  return [from, to].map((at) => [at, line.value(at)] as const);
}

function knots(curve: Polynomial, from: number, to: number): readonly (readonly [number, number])[] {
  return Array.from({ length: KNOTS }, (_, i) => {
    const at = from + ((to - from) * i) / (KNOTS - 1);
    return [at, curve.value(at)] as const;
  });
}
