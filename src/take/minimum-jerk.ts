/**
 * Minimum-jerk way between two states, each with its own speed, over duration T: the fifth-order polynomial without
 * acceleration at its ends. From rest to rest it is T. Flash and N. Hogan's, J. Neurosci. 5 (1985) 1688-1703:
 * s = 10u^3 - 15u^4 + 6u^5.
 */
export interface Blend {
  /** Position after `s` seconds, 0 to T. */
  at(s: number): number;
  speed(s: number): number;
}

/** @param seconds T, over 0 */
export function blend(x0: number, v0: number, x1: number, v1: number, seconds: number): Blend {
  const D = x1 - x0;
  const p = v0 * seconds;
  const q = v1 * seconds;
  // Coefficients of u^3, u^4, u^5 that meet x1 and v1 with no acceleration at either end.
  const c3 = 10 * D - 6 * p - 4 * q;
  const c4 = -15 * D + 8 * p + 7 * q;
  const c5 = 6 * D - 3 * p - 3 * q;
  return {
    at(s) {
      const u = s / seconds;
      return x0 + u * (p + u * u * (c3 + u * (c4 + u * c5)));
    },
    speed(s) {
      const u = s / seconds;
      return (p + u * u * (3 * c3 + u * (4 * c4 + u * 5 * c5))) / seconds;
    },
  };
}
