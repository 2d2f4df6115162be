/**
 * Polynomials of every degree up to a largest one, fitted by least squares through orthogonal polynomials
 * (G. E. Forsythe, "Generation and Use of Orthogonal Polynomials for Data-Fitting with a Digital Computer",
 * J. SIAM 5 (1957) 74-88). Coefficients of that basis do not depend on each other, so one pass serves all degrees, and
 * counts of any size lose no digits.
 */
export interface Polynomial {
  readonly degree: number;
  /** Points. */
  readonly n: number;
  /** Points less coefficients. */
  readonly dof: number;
  /** Sum of the squared residuals. */
  readonly squares: number;
  /** Standard deviation of a point about the curve; NaN when there are no more points than coefficients. */
  readonly sigma: number;
  /** y - value(x), parallel to the points. */
  readonly residuals: Float64Array;
  value(x: number): number;
  /** dy/dx. */
  slope(x: number): number;
  /** Variance of value(x) in units of sigma squared. */
  leverage(x: number): number;
  /** Variance of slope(x) in units of sigma squared. */
  slopeLeverage(x: number): number;
  /** Its last term, scaled so that its squares over the points sum to 1: the coefficient then has the variance of a point. */
  readonly last: { readonly coefficient: number; value(x: number): number };
}

/**
 * @param x n values, at least two of them different
 * @param y n values
 * @returns entry d is the fit of degree d; fewer than asked for where there are too few different x
 */
export function polynomials(x: ArrayLike<number>, y: ArrayLike<number>, degreeMax: number): readonly Polynomial[] {
  const n = x.length;
  const basis = orthogonalBasis(x, Math.min(degreeMax, n - 1));
  const residuals = Float64Array.from(y);
  const coefficients: number[] = [];
  return basis.map((member, degree) => {
    let projected = 0;
    for (let i = 0; i < n; i++) projected += (member.at[i] as number) * (residuals[i] as number);
    const coefficient = projected / member.norm;
    coefficients.push(coefficient);
    for (let i = 0; i < n; i++) residuals[i] = (residuals[i] as number) - coefficient * (member.at[i] as number);
    return polynomial(basis.slice(0, degree + 1), [...coefficients], residuals.slice());
  });
}

/** p_k+1(x) = (x - shift) p_k(x) - ratio p_k-1(x) */
interface Member {
  readonly shift: number;
  readonly ratio: number;
  /** Values at the points, and the sum of their squares. */
  readonly at: Float64Array;
  readonly norm: number;
}

/** A polynomial that vanishes on all points to this share of its scale has no more to say. */
const VANISHED = 1e-12;

function orthogonalBasis(x: ArrayLike<number>, degreeMax: number): readonly Member[] {
  const n = x.length;
  const members: Member[] = [];
  let before = new Float64Array(n);
  let now = new Float64Array(n).fill(1);
  let normBefore = 1;
  for (let degree = 0; degree <= degreeMax; degree++) {
    let norm = 0;
    let weighted = 0;
    for (let i = 0; i < n; i++) {
      const square = (now[i] as number) ** 2;
      norm += square;
      weighted += square * (x[i] as number);
    }
    if (degree > 0 && norm <= VANISHED * scaleOf(x, members)) break;
    const shift = weighted / norm;
    const ratio = degree === 0 ? 0 : norm / normBefore;
    members.push({ shift, ratio, at: now, norm });
    const next = new Float64Array(n);
    for (let i = 0; i < n; i++) {
      next[i] = ((x[i] as number) - shift) * (now[i] as number) - ratio * (before[i] as number);
    }
    before = now;
    now = next;
    normBefore = norm;
  }
  return members;
}

/** What the next member's squares would come to if it did not vanish: the last ones times the spread of x. */
function scaleOf(x: ArrayLike<number>, members: readonly Member[]): number {
  const last = members.at(-1) as Member;
  let spread = 0;
  for (let i = 0; i < x.length; i++) spread = Math.max(spread, ((x[i] as number) - (members[0] as Member).shift) ** 2);
  return last.norm * Math.max(spread, Number.MIN_VALUE);
}

function polynomial(basis: readonly Member[], coefficients: readonly number[], residuals: Float64Array): Polynomial {
  const n = residuals.length;
  const dof = n - basis.length;
  const squares = residuals.reduce((sum, r) => sum + r * r, 0);
  /** Sums `of(k, p_k(x), p_k'(x))` over the basis. */
  const summed = (x: number, of: (k: number, p: number, slope: number) => number): number => {
    let [p, pBefore, s, sBefore, sum] = [1, 0, 0, 0, 0];
    for (let k = 0; k < basis.length; k++) {
      sum += of(k, p, s);
      const { shift, ratio } = basis[k] as Member;
      const pNext = (x - shift) * p - ratio * pBefore;
      const sNext = p + (x - shift) * s - ratio * sBefore;
      [pBefore, sBefore, p, s] = [p, s, pNext, sNext];
    }
    return sum;
  };
  const normOf = (k: number): number => (basis[k] as Member).norm;
  const top = basis.length - 1;
  return {
    degree: basis.length - 1,
    n,
    dof,
    squares,
    sigma: dof > 0 ? Math.sqrt(squares / dof) : Number.NaN,
    residuals,
    value: (x) => summed(x, (k, p) => (coefficients[k] as number) * p),
    slope: (x) => summed(x, (k, _, s) => (coefficients[k] as number) * s),
    leverage: (x) => summed(x, (k, p) => (p * p) / normOf(k)),
    slopeLeverage: (x) => summed(x, (k, _, s) => (s * s) / normOf(k)),
    last: {
      coefficient: (coefficients[top] as number) * Math.sqrt(normOf(top)),
      value: (x) => summed(x, (k, p) => (k === top ? p / Math.sqrt(normOf(top)) : 0)),
    },
  };
}
