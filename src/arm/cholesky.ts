/**
 * Cholesky's factor of a symmetric matrix, in place: m = L L'. Only the lower half is read and written.
 * @param m row by row, `size` values a row
 * @param n rows and columns in use, at most `size`
 * @returns false where m is not positive definite; m is then spoilt
 */
export function factor(m: Float64Array, size: number, n: number): boolean {
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      let sum = m[i * size + j] as number;
      for (let k = 0; k < j; k++) sum -= (m[i * size + k] as number) * (m[j * size + k] as number);
      if (i !== j) m[i * size + j] = sum / (m[j * size + j] as number);
      else if (sum > 0) m[i * size + i] = Math.sqrt(sum);
      else return false;
    }
  }
  return true;
}

/** Solves L L' x = b in place, with the factor as `factor` leaves it. */
export function solve(m: Float64Array, size: number, n: number, b: Float64Array): void {
  for (let i = 0; i < n; i++) {
    let sum = b[i] as number;
    for (let k = 0; k < i; k++) sum -= (m[i * size + k] as number) * (b[k] as number);
    b[i] = sum / (m[i * size + i] as number);
  }
  for (let i = n - 1; i >= 0; i--) {
    let sum = b[i] as number;
    for (let k = i + 1; k < n; k++) sum -= (m[k * size + i] as number) * (b[k] as number);
    b[i] = sum / (m[i * size + i] as number);
  }
}
