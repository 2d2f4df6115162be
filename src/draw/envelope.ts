import { chain } from '../arm/chain.ts';
import { reachM } from '../arm/extent.ts';
import { reaching } from '../arm/reaching.ts';
import type { JointRange } from '../arm/reaching.ts';
import type { ArmSpec } from '../arm/spec.ts';
import { spread } from '../arm/spread.ts';
import { contours, simplified } from './contour.ts';
import type { Point } from './contour.ts';

/** Where a tip can be, seen from one side: closed lines in metres; holes have lines of their own. */
export type Envelope = readonly (readonly Point[])[];

export interface Envelopes {
  /** From the arm's right: x forward, z up. */
  readonly side: Envelope;
  /** From above: x forward, y left. */
  readonly plan: Envelope;
}

/** Cells across the whole reach: on paper, one is about half a millimetre. */
const CELLS = 260;
/** Cells left free around, for the outlines and for closing gaps. */
const RIM = 4;
/** Poses looked at inside the ranges. */
const POSES = 150_000;
/** Looks along one joint while the others stand at an end or straight: that is where outlines come from. */
const FINE = 240;
/** Gaps of this many cells between looks are closed. */
const GAP = 2;

/**
 * Outlines of all places the tip can be at, keep-outs aside, found by posing the arm all over its ranges. It runs
 * about a cell outside, 1 % of the reach: for the eye, not for a certificate.
 * @param ranges one a joint of the profile
 */
export function envelopes(arm: ArmSpec, ranges: readonly JointRange[]): Envelopes {
  const cellM = (2 * reachM(arm)) / CELLS;
  const size = CELLS + 2 * RIM + 1;
  const centreZ = arm.base.heightM;
  const marked = { side: new Uint8Array(size * size), plan: new Uint8Array(size * size) };
  const poser = chain(arm);
  const pose = new Float64Array(ranges.length);
  const tip = 3 * poser.links;
  const column = (value: number): number => Math.round(value / cellM) + CELLS / 2 + RIM;
  const look = (): void => {
    poser.pose(pose);
    const x = column(poser.at[tip] as number);
    marked.side[column((poser.at[tip + 2] as number) - centreZ) * size + x] = 1;
    marked.plan[column(poser.at[tip + 1] as number) * size + x] = 1;
  };
  const moving = reaching(arm, ranges);
  centre(ranges, pose);
  everywhere(ranges, moving, pose, look);
  alongEnds(ranges, moving, pose, look);
  const traced = (cells: Uint8Array, upM: number): Envelope =>
    contours(blurred(closed(cells, size), size), size, size, 0.5).map((ring) =>
      simplified(ring, 0.4).map(([x, y]) => [(x - CELLS / 2 - RIM) * cellM, (y - CELLS / 2 - RIM) * cellM + upM]),
    );
  return { side: traced(marked.side, centreZ), plan: traced(marked.plan, 0) };
}

/** Poses all over the ranges, closer together near the ends, where outlines are. */
function everywhere(
  ranges: readonly JointRange[],
  moving: readonly number[],
  pose: Float64Array,
  look: () => void,
): void {
  const places = spread(moving.length);
  for (let n = 1; n <= POSES; n++) {
    for (const [k, joint] of moving.entries()) {
      const { minRad, maxRad } = ranges[joint] as JointRange;
      pose[joint] = minRad + 0.5 * (1 - Math.cos(Math.PI * places.at(n, k))) * (maxRad - minRad);
    }
    look();
  }
}

/** One joint at a time, finely, while each other one stands at its lowest, its highest, its middle or at zero. */
function alongEnds(
  ranges: readonly JointRange[],
  moving: readonly number[],
  pose: Float64Array,
  look: () => void,
): void {
  const stands = moving.map((joint) => standsOf(ranges[joint] as JointRange));
  for (const [k, joint] of moving.entries()) {
    const { minRad, maxRad } = ranges[joint] as JointRange;
    const others = moving.flatMap((other, i) => (i === k ? [] : [[other, stands[i] as readonly number[]] as const]));
    const combinations = others.reduce((product, [, angles]) => product * angles.length, 1);
    for (let combination = 0; combination < Math.min(combinations, COMBINATIONS_MAX); combination++) {
      let rest = combination;
      for (const [other, angles] of others) {
        pose[other] = angles[rest % angles.length] as number;
        rest = Math.floor(rest / angles.length);
      }
      for (let step = 0; step <= FINE; step++) {
        pose[joint] = minRad + (step / FINE) * (maxRad - minRad);
        look();
      }
    }
  }
}

/** Four joints of four stands each, three at a time; an eighth joint hardly moves an outline. */
const COMBINATIONS_MAX = 256;

function standsOf({ minRad, maxRad }: JointRange): readonly number[] {
  const middle = 0.5 * (minRad + maxRad);
  return [...new Set([minRad, maxRad, middle, Math.max(minRad, Math.min(maxRad, 0))])];
}

function centre(ranges: readonly JointRange[], pose: Float64Array): void {
  for (const [j, { minRad, maxRad }] of ranges.entries()) pose[j] = Math.max(minRad, Math.min(maxRad, 0));
}

/**
 * Grown by `GAP` cells and shrunk by one less: gaps between looks close, and what is a line or a spot stays wide enough
 * to have an outline, one cell outside.
 */
function closed(cells: Uint8Array, size: number): Uint8Array {
  return grown(grown(cells, size, 1, GAP), size, 0, GAP - 1);
}

function grown(cells: Uint8Array, size: number, what: 0 | 1, by: number): Uint8Array {
  const out = cells.slice();
  for (let y = by; y < size - by; y++) {
    for (let x = by; x < size - by; x++) {
      if (cells[y * size + x] !== what) continue;
      for (let dy = -by; dy <= by; dy++)
        for (let dx = -by; dx <= by; dx++) if (dx * dx + dy * dy <= by * by) out[(y + dy) * size + x + dx] = what;
    }
  }
  return out;
}

/** The mean of each cell and its eight neighbours, so that outlines run smoothly between cells. */
function blurred(cells: Uint8Array, size: number): Float64Array {
  const out = new Float64Array(size * size);
  for (let y = 1; y < size - 1; y++) {
    for (let x = 1; x < size - 1; x++) {
      let sum = 0;
      for (let dy = -1; dy <= 1; dy++)
        for (let dx = -1; dx <= 1; dx++) sum += cells[(y + dy) * size + x + dx] as number;
      out[y * size + x] = sum / 9;
    }
  }
  return out;
}
