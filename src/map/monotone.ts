/**
 * Slopes of a cubic through points that keeps monotone data monotone.
 *
 * F. N. Fritsch and R. E. Carlson, "Monotone Piecewise Cubic Interpolation", SIAM J. Numer. Anal. 17 (1980) 238-246:
 * mean of the neighbouring secants inside, the end's secant at the ends, then every pair pulled back into the
 * circle of radius 3, in which the cubic cannot turn.
 * @param x strictly rising, n >= 2
 * @param y n values
 * @returns n slopes, y per x
 */
export function monotoneSlopes(x: Float64Array, y: Float64Array): Float64Array {
  const n = x.length;
  const secants = new Float64Array(n - 1);
  for (let i = 0; i < n - 1; i++) {
    secants[i] = ((y[i + 1] as number) - (y[i] as number)) / ((x[i + 1] as number) - (x[i] as number));
  }
  const slopes = new Float64Array(n);
  slopes[0] = secants[0] as number;
  slopes[n - 1] = secants[n - 2] as number;
  for (let i = 1; i < n - 1; i++) {
    const before = secants[i - 1] as number;
    const after = secants[i] as number;
    slopes[i] = before * after > 0 ? 0.5 * (before + after) : 0;
  }
  for (let i = 0; i < n - 1; i++) {
    const secant = secants[i] as number;
    if (secant === 0) {
      slopes[i] = 0;
      slopes[i + 1] = 0;
      continue;
    }
    const a = (slopes[i] as number) / secant;
    const b = (slopes[i + 1] as number) / secant;
    const radius = Math.hypot(a, b);
    if (radius > 3) {
      slopes[i] = (3 / radius) * a * secant;
      slopes[i + 1] = (3 / radius) * b * secant;
    }
  }
  return slopes;
}
