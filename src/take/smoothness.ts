import { magnitudes } from './fft.ts';

/**
 * How smooth a movement is, from its speed. Both measures are negative, and nearer to zero is smoother.
 * S. Balasubramanian, A. Melendez-Calderon, A. Roby-Brami, E. Burdet, "On the analysis of movement smoothness",
 * J. NeuroEng. Rehabil. 12:112 (2015), with the parameters of the authors' own code.
 */

const PAD_DOUBLINGS = 4;
const CUTOFF_HZ = 10;
const LEAST_MAGNITUDE = 0.05;

/** Spectral arc length of a speed profile sampled at `rateHz`. */
export function spectralArcLength(speed: Float64Array, rateHz: number): number {
  const size = 2 ** (Math.ceil(Math.log2(speed.length)) + PAD_DOUBLINGS);
  const spectrum = magnitudes(speed, size);
  let top = 0;
  for (const value of spectrum) top = Math.max(top, value);
  if (top === 0) return Number.NaN;
  const inBand = Math.min(spectrum.length - 1, Math.floor((CUTOFF_HZ * size) / rateHz));
  let first = 0;
  while (first < inBand && (spectrum[first] as number) / top < LEAST_MAGNITUDE) first++;
  let last = inBand;
  while (last > first && (spectrum[last] as number) / top < LEAST_MAGNITUDE) last--;
  let arc = 0;
  for (let k = first + 1; k <= last; k++) {
    const step = 1 / (last - first);
    const rise = ((spectrum[k] as number) - (spectrum[k - 1] as number)) / top;
    arc += Math.hypot(step, rise);
  }
  return -arc;
}

/** Dimensionless jerk of a speed profile: -(T^3 / v_peak^2) times the integral of the squared second derivative. */
export function dimensionlessJerk(speed: Float64Array, rateHz: number): number {
  const dt = 1 / rateHz;
  const duration = speed.length * dt;
  let peak = 0;
  for (const value of speed) peak = Math.max(peak, Math.abs(value));
  let sum = 0;
  for (let i = 2; i < speed.length; i++) {
    const bend = (speed[i] as number) - 2 * (speed[i - 1] as number) + (speed[i - 2] as number);
    sum += (bend / (dt * dt)) ** 2;
  }
  return (-(duration ** 3) / (peak * peak)) * sum * dt;
}

export function logDimensionlessJerk(speed: Float64Array, rateHz: number): number {
  return -Math.log(Math.abs(dimensionlessJerk(speed, rateHz)));
}
