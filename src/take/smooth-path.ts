import { SAMPLES_HZ } from './motion.ts';

/**
 * Samples of several joints, made into a curve that is smooth enough to be judged and commanded: a converter's step in 1 ms
 * would be 1e5 deg/s^2. A Gaussian that halves what moves at 5 Hz makes control points of a uniform cubic B-spline (C. de
 * Boor, A Practical Guide to Splines, 1978; from memory). Neither has a negative weight, so the curve never leaves the span
 * of its samples, and so no range; its acceleration is linear between control points, so that its peak is known exactly.
 */
const HALVED_HZ = 5;
/** exp(-2 (pi sigma f)^2) = 1/2. */
const SIGMA = (Math.sqrt(Math.LN2 / 2) / (Math.PI * HALVED_HZ)) * SAMPLES_HZ;
/** Samples on either side that the Gaussian weighs. */
export const REACH = Math.ceil(4 * SIGMA);

const WEIGHTS = gaussian();

function gaussian(): Float64Array {
  const raw = Float64Array.from({ length: 2 * REACH + 1 }, (_, i) => Math.exp(-0.5 * ((i - REACH) / SIGMA) ** 2));
  const sum = raw.reduce((total, weight) => total + weight, 0);
  return raw.map((weight) => weight / sum);
}

/** Four control points: those of one piece of the curve, the newest last. Reused. */
export type Piece = readonly [Float64Array, Float64Array, Float64Array, Float64Array];

/** Pieces of the curve, each 1 / `SAMPLES_HZ` long; it begins standing at the first sample and ends standing at the last. */
export function* pieces(samples: Iterable<Float64Array>): Generator<Piece> {
  const ring: Float64Array[] = [];
  let piece: Piece | null = null;
  let next = 0;
  const push = (sample: Float64Array): Piece => {
    (ring[next] as Float64Array).set(sample);
    next = (next + 1) % ring.length;
    const [oldest, ...others] = piece as Piece;
    average(ring, next, oldest);
    piece = [...others, oldest] as [Float64Array, Float64Array, Float64Array, Float64Array];
    return piece;
  };
  for (const sample of samples) {
    if (piece === null) {
      for (let i = 0; i < WEIGHTS.length; i++) ring.push(sample.slice());
      piece = [sample.slice(), sample.slice(), sample.slice(), sample.slice()];
    }
    yield push(sample);
  }
  const last = ring[(next + ring.length - 1) % ring.length]?.slice();
  // Until nothing but the last sample is weighed, and three control points are alike.
  if (last !== undefined) for (let i = 0; i < 2 * REACH + 2; i++) yield push(last);
}

/** @param oldest where in the ring the oldest sample is */
function average(ring: readonly Float64Array[], oldest: number, out: Float64Array): void {
  out.fill(0);
  for (let i = 0; i < WEIGHTS.length; i++) {
    const sample = ring[(oldest + i) % ring.length] as Float64Array;
    const weight = WEIGHTS[i] as number;
    for (let j = 0; j < out.length; j++) out[j] = (out[j] as number) + weight * (sample[j] as number);
  }
}

/** A curve that is gone along; NaN before its start, and all along where there are no samples. */
export interface Path {
  readonly anglesRad: Float64Array;
  readonly speedsRadS: Float64Array;
  /** Goes to `s` seconds from its start, never back; false once it is over: it then stands at its end. */
  to(s: number): boolean;
}

/** @param width joints of a sample */
export function path(samples: Iterable<Float64Array>, width: number): Path {
  const ahead = pieces(samples);
  let piece: Piece | null = null;
  let index = -1;
  let isOver = false;
  const pull = (): void => {
    const step = ahead.next();
    if (step.done === true) isOver = true;
    else {
      piece = step.value;
      index++;
    }
  };
  const self = {
    anglesRad: new Float64Array(width).fill(Number.NaN),
    speedsRadS: new Float64Array(width).fill(Number.NaN),
    to(s: number): boolean {
      while (!isOver && index < Math.floor(s * SAMPLES_HZ)) pull();
      if (piece !== null) place(piece, isOver ? 1 : s * SAMPLES_HZ - index, self);
      return !isOver;
    },
  };
  return self;
}

/** @param u how far along the piece, 0 to 1 */
function place([a, b, c, d]: Piece, u: number, out: Pick<Path, 'anglesRad' | 'speedsRadS'>): void {
  const w = 1 - u;
  const [wa, wb] = [(w * w * w) / 6, (3 * u * u * u - 6 * u * u + 4) / 6];
  const [wd, wc] = [(u * u * u) / 6, (3 * w * w * w - 6 * w * w + 4) / 6];
  for (let j = 0; j < a.length; j++) {
    const [p, q, r, s] = [a[j], b[j], c[j], d[j]] as [number, number, number, number];
    out.anglesRad[j] = wa * p + wb * q + wc * r + wd * s;
    out.speedsRadS[j] = 0.5 * SAMPLES_HZ * (w * w * (q - p) + (1 + 2 * u * w) * (r - q) + u * u * (s - r));
  }
}

/** The highest speed of joint `j` on a piece, rad/s. */
export function peakSpeed([a, b, c, d]: Piece, j: number): number {
  const first = (b[j] as number) - (a[j] as number);
  const middle = (c[j] as number) - (b[j] as number);
  const last = (d[j] as number) - (c[j] as number);
  const bend = [middle - first, last - middle] as const;
  const ends = Math.max(Math.abs(first + middle), Math.abs(middle + last)) / 2;
  if (bend[0] * bend[1] >= 0) return SAMPLES_HZ * ends;
  // Between them it turns: there the acceleration is zero.
  const u = bend[0] / (bend[0] - bend[1]);
  const w = 1 - u;
  return SAMPLES_HZ * Math.max(ends, Math.abs(w * w * first + (1 + 2 * u * w) * middle + u * u * last) / 2);
}

/** The acceleration of joint `j` where a piece begins, rad/s^2; within the piece it goes straight to that of the next. */
export function accelAt([a, b, c]: Piece, j: number): number {
  return ((a[j] as number) - 2 * (b[j] as number) + (c[j] as number)) * SAMPLES_HZ * SAMPLES_HZ;
}
