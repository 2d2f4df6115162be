import { US_PER_S } from '../clock/clock.ts';
import type { OneEuroSpec } from './spec.ts';

/**
 * Speed-adaptive low-pass: strong while the hand is still, light while it moves.
 *
 * G. Casiez, N. Roussel, D. Vogel, "1 Euro Filter", CHI 2012, 2527-2530, doi 10.1145/2207676.2208639. The slope is
 * taken from the previous *filtered* value, as the authors' code does since August 2023; many copies still use the raw one.
 */
export interface OneEuro {
  /** output[j] = filtered input[j] at nowUs[0]; the first value passes through, a stamp that does not advance keeps the rate. */
  push(j: number, nowUs: Float64Array, input: Float64Array, output: Float64Array): void;
  /** Forgets joint `j`'s past: the next value passes through. */
  reset(j: number): void;
}

/** Rate assumed until two stamps exist, in hertz; the authors' example value. It has no effect on the first value. */
const RATE_HZ_DEFAULT = 120;

/** @param specs one a joint; null: that joint passes through */
export function oneEuro(specs: readonly (OneEuroSpec | null)[]): OneEuro {
  const n = specs.length;
  const cutoffHz = Float64Array.from(specs, (s) => s?.cutoffHz ?? Number.NaN);
  const beta = Float64Array.from(specs, (s) => s?.betaHzPerRadS ?? 0);
  const slopeCutoffHz = Float64Array.from(specs, (s) => s?.slopeCutoffHz ?? 0);
  const value = new Float64Array(n).fill(Number.NaN);
  const slope = new Float64Array(n);
  const lastUs = new Float64Array(n);
  const rateHz = new Float64Array(n).fill(RATE_HZ_DEFAULT);
  return {
    push(j, nowUs, input, output) {
      const tUs = nowUs[0] as number;
      const x = input[j] as number;
      const before = value[j] as number;
      if (Number.isNaN(cutoffHz[j] as number)) {
        output[j] = x;
        return;
      }
      if (Number.isNaN(before)) {
        value[j] = x;
        slope[j] = 0;
        lastUs[j] = tUs;
        output[j] = x;
        return;
      }
      const dtUs = tUs - (lastUs[j] as number);
      if (dtUs > 0) rateHz[j] = US_PER_S / dtUs;
      lastUs[j] = tUs;
      const rate = rateHz[j] as number;
      const slopeNow =
        (slope[j] as number) + share(slopeCutoffHz[j] as number, rate) * ((x - before) * rate - (slope[j] as number));
      slope[j] = slopeNow;
      const cutoff = (cutoffHz[j] as number) + (beta[j] as number) * Math.abs(slopeNow);
      const filtered = before + share(cutoff, rate) * (x - before);
      value[j] = filtered;
      output[j] = filtered;
    },
    reset(j) {
      value[j] = Number.NaN;
    },
  };
}

/** Share of the new value in an exponential low-pass of `cutoffHz` sampled at `rateHz`. */
function share(cutoffHz: number, rateHz: number): number {
  return 1 / (1 + rateHz / (2 * Math.PI * cutoffHz));
}
