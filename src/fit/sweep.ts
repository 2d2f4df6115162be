import { type Dwell, dwellsOf, medianOf } from './dwells.ts';
import { type Hysteresis, hysteresisOf } from './hysteresis.ts';
import { effectiveBits, noiseOf } from './noise.ts';
import { merged, overlap, type Stretch, trackOf } from './track.ts';

/** What slow sweeps of one joint from end to end and back say of its pot; all in counts. */
export interface Sweep {
  readonly readings: number;
  /** What the joint uses of the converter, spikes and dead spots apart. */
  readonly span: readonly [number, number];
  /** Both ends were stood at twice and read alike. */
  readonly endsConfirmed: boolean;
  readonly noiseCounts: number;
  readonly effectiveBits: number;
  /** Single readings off the path. */
  readonly spikes: number;
  /** Where the wiper loses its track, each between the last sound counts before and after. */
  readonly deadSpots: readonly Stretch[];
  /** Counts passed over without one reading although the joint went through them. */
  readonly gaps: readonly Stretch[];
  /** Share of the span's hundredths that were read at all, 0 to 1. */
  readonly visited: number;
  /** The joint runs over the end of the track and goes on at its other end. */
  readonly wraps: boolean;
  /** Counts at one place coming up less those coming down; null: no place was stood at both ways. */
  readonly hysteresis: Hysteresis | null;
}

/** A step that no hand makes in one reading, as a share of the converter's range. */
const JUMP_SHARE = 0.04;
/** A gap has to be wider than this share of the range, and than so many usual steps. */
const GAP_SHARE = 0.01;
const GAP_STEPS = 6;
/** Two dwells at one end read alike within this share of the span. */
const END_SHARE = 0.02;

/**
 * @param counts readings of one joint in order of time, two or more
 * @param range what the converter can read
 * @param restNoise standard deviation at rest where it was measured, in counts; null: taken from the dwells
 */
export function analyseSweep(counts: readonly number[], range: Stretch, restNoise: number | null): Sweep {
  const width = range[1] - range[0];
  const jump = JUMP_SHARE * width;
  const { sound, lost, spikes, wraps } = trackOf(counts, jump, width);
  const path = sound.map((i) => counts[i] as number);
  const rough = Math.max(restNoise ?? roughNoise(path), 0.3);
  const dwells = dwellsOf(path, rough);
  const noise = restNoise ?? dwellNoise(path, dwells) ?? rough;
  const sorted = path.toSorted((a, b) => a - b);
  const outer: Stretch = [sorted[0] ?? Number.NaN, sorted.at(-1) ?? Number.NaN];
  const span = spanOf(sorted, dwells, outer);
  const deadSpots = merged(lost);
  const gaps = gapsOf(sorted, path, width).filter((gap) => !deadSpots.some((spot) => overlap(gap, spot)));
  return {
    readings: counts.length,
    span,
    endsConfirmed: endsConfirmed(dwells, span),
    noiseCounts: noise,
    effectiveBits: effectiveBits(span[1] - span[0], noise),
    spikes,
    deadSpots,
    gaps,
    visited: visitedShare(path, span),
    wraps,
    hysteresis: hysteresisOf(dwells, span, noise),
  };
}

/** From second differences, which a steady hand leaves at zero: their deviation is sqrt(6) that of a reading. */
function roughNoise(path: readonly number[]): number {
  const bends = path.slice(2).map((at, i) => Math.abs(at - 2 * (path[i + 1] as number) + (path[i] as number)));
  return bends.length === 0 ? 0 : (1.4826 * medianOf(bends)) / Math.sqrt(6);
}

function dwellNoise(path: readonly number[], dwells: readonly Dwell[]): number | null {
  if (dwells.length === 0) return null;
  const squares = dwells.map(({ from, to }) => {
    const trim = Math.floor((to - from) / 5);
    return noiseOf(path.slice(from + trim, to - trim)).counts ** 2;
  });
  // The median of them: one dwell of an unsteady hand is not the pot's noise.
  return Math.sqrt(medianOf(squares));
}

/** Ends where the joint stood; without dwells, all but the outermost two in a thousand readings. */
function spanOf(sorted: readonly number[], dwells: readonly Dwell[], outer: Stretch): Stretch {
  const cut = Math.floor(sorted.length / 500);
  const most: Stretch = [sorted[cut] ?? outer[0], sorted[sorted.length - 1 - cut] ?? outer[1]];
  const near = END_SHARE * (most[1] - most[0]);
  const low = dwells.filter(({ counts }) => counts <= most[0] + near).map(({ counts }) => counts);
  const high = dwells.filter(({ counts }) => counts >= most[1] - near).map(({ counts }) => counts);
  return [low.length > 0 ? Math.min(...low) : most[0], high.length > 0 ? Math.max(...high) : most[1]];
}

function endsConfirmed(dwells: readonly Dwell[], [low, high]: Stretch): boolean {
  const near = END_SHARE * (high - low);
  const at = (end: number): number => dwells.filter(({ counts }) => Math.abs(counts - end) <= near).length;
  return at(low) >= 2 && at(high) >= 2;
}

function gapsOf(sorted: readonly number[], path: readonly number[], width: number): readonly Stretch[] {
  const steps = path.slice(1).map((at, i) => Math.abs(at - (path[i] as number)));
  const usual = medianOf(steps.filter((step) => step > 0));
  const least = Math.max(GAP_SHARE * width, GAP_STEPS * (Number.isNaN(usual) ? 1 : usual));
  return sorted
    .slice(1)
    .map((at, i): Stretch => [sorted[i] as number, at])
    .filter(([from, to]) => to - from > least);
}

const BINS = 100;

function visitedShare(path: readonly number[], [low, high]: Stretch): number {
  const bins = new Uint8Array(BINS);
  for (const at of path) {
    const bin = Math.floor((BINS * (at - low)) / (high - low));
    if (bin >= 0 && bin < BINS) bins[bin] = 1;
  }
  return bins.reduce((sum, one) => sum + one, 0) / BINS;
}
