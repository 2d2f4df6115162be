/** y = (b0 x + b1 x' + b2 x'') - a1 y' - a2 y'', one second-order section. */
export interface Biquad {
  readonly b: readonly [number, number, number];
  readonly a: readonly [1, number, number];
}

/**
 * Second-order Butterworth low-pass by the bilinear transform, its cutoff (3 dB down) pre-warped to its place
 * (A. V. Oppenheim, R. W. Schafer, Discrete-Time Signal Processing, 1989, ch. 7; from memory).
 */
export function butterworth(cutoffHz: number, rateHz: number): Biquad {
  const k = Math.tan((Math.PI * cutoffHz) / rateHz);
  const norm = 1 / (1 + Math.SQRT2 * k + k * k);
  const b0 = k * k * norm;
  return { b: [b0, 2 * b0, b0], a: [1, 2 * (k * k - 1) * norm, (1 - Math.SQRT2 * k + k * k) * norm] };
}

/**
 * Filters in place, forward and then backward: no delay, and 6 dB down at the cutoff. The signal goes on at its ends
 * turned about its end values, so that neither end starts with a jump.
 */
export function zeroPhase(signal: Float64Array, filter: Biquad, padding: number): void {
  const n = signal.length;
  const pad = Math.min(padding, n - 1);
  if (pad < 1) return;
  const first = signal[0] as number;
  const last = signal[n - 1] as number;
  const long = new Float64Array(n + 2 * pad);
  long.set(signal, pad);
  for (let i = 1; i <= pad; i++) {
    long[pad - i] = 2 * first - (signal[i] as number);
    long[pad + n - 1 + i] = 2 * last - (signal[n - 1 - i] as number);
  }
  pass(long, filter);
  long.reverse();
  pass(long, filter);
  long.reverse();
  signal.set(long.subarray(pad, pad + n));
}

/** Starts as if its first value had stood for ever. */
function pass(x: Float64Array, { b, a }: Biquad): void {
  const start = x[0] as number;
  let x1 = start;
  let x2 = start;
  let y1 = start;
  let y2 = start;
  for (let i = 0; i < x.length; i++) {
    const x0 = x[i] as number;
    const y0 = b[0] * x0 + b[1] * x1 + b[2] * x2 - a[1] * y1 - a[2] * y2;
    x2 = x1;
    x1 = x0;
    y2 = y1;
    y1 = y0;
    x[i] = y0;
  }
}
