/**
 * Tails of the distributions that errors are stated with: Student's t and Fisher's F, both from the regularised
 * incomplete beta function (NIST Digital Library of Mathematical Functions, 8.17).
 */

/** Coefficients for g = 7 (C. Lanczos, SIAM J. Numer. Anal. B 1 (1964) 86-96; the usual nine, from memory). */
const LANCZOS = [
  0.99999999999980993, 676.5203681218851, -1259.1392167224028, 771.32342877765313, -176.61502916214059,
  12.507343278686905, -0.13857109526572012, 9.9843695780195716e-6, 1.5056327351493116e-7,
] as const;
const LANCZOS_G = 7;

/** Logarithm of the gamma function, x > 0. */
function logGamma(x: number): number {
  const z = x - 1;
  const sum = LANCZOS.reduce((total, c, i) => (i === 0 ? c : total + c / (z + i)), 0);
  const t = z + LANCZOS_G + 0.5;
  return 0.5 * Math.log(2 * Math.PI) + (z + 0.5) * Math.log(t) - t + Math.log(sum);
}

/** Terms after which the continued fraction has settled for every count of points that a person measures. */
const TERMS_MAX = 500;
const SETTLED = 1e-15;
const TINY = 1e-300;

/** I_x(a, b), 0 <= x <= 1 (DLMF 8.17.22, by Lentz's method). */
function incompleteBeta(x: number, a: number, b: number): number {
  if (x <= 0) return 0;
  if (x >= 1) return 1;
  // The fraction converges quickly on the near side of the mean only.
  if (x > (a + 1) / (a + b + 2)) return 1 - incompleteBeta(1 - x, b, a);
  const front = Math.exp(logGamma(a + b) - logGamma(a) - logGamma(b) + a * Math.log(x) + b * Math.log1p(-x)) / a;
  const safe = (value: number): number => (Math.abs(value) < TINY ? TINY : value);
  let c = 1;
  let d = 1 / safe(1 - ((a + b) * x) / (a + 1));
  let fraction = d;
  for (let m = 1; m < TERMS_MAX; m++) {
    const even = (m * (b - m) * x) / ((a + 2 * m - 1) * (a + 2 * m));
    d = 1 / safe(1 + even * d);
    c = safe(1 + even / c);
    fraction *= c * d;
    const odd = (-(a + m) * (a + b + m) * x) / ((a + 2 * m) * (a + 2 * m + 1));
    d = 1 / safe(1 + odd * d);
    c = safe(1 + odd / c);
    fraction *= c * d;
    if (Math.abs(c * d - 1) < SETTLED) break;
  }
  return front * fraction;
}

/** Probability that Student's t of `dof` degrees of freedom is further from zero than `t`, on either side. */
export function studentTails(t: number, dof: number): number {
  return incompleteBeta(dof / (dof + t * t), dof / 2, 0.5);
}

const BISECTIONS = 200;
const T_MAX = 1e6;

/**
 * The t that is exceeded in size with probability `tails`: for a two-sided 95 % interval, 0.05.
 * @param dof degrees of freedom, 1 or more
 */
export function studentT(tails: number, dof: number): number {
  let low = 0;
  let high = T_MAX;
  for (let i = 0; i < BISECTIONS && high - low > 1e-12 * high; i++) {
    const middle = 0.5 * (low + high);
    if (studentTails(middle, dof) > tails) low = middle;
    else high = middle;
  }
  return 0.5 * (low + high);
}

/** Probability that Fisher's F of (`d1`, `d2`) degrees of freedom is larger than `f`. */
export function fisherTail(f: number, d1: number, d2: number): number {
  if (!(f > 0)) return 1;
  if (f === Number.POSITIVE_INFINITY) return 0;
  return incompleteBeta(d2 / (d2 + d1 * f), d2 / 2, d1 / 2);
}
