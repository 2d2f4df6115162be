import { GRAVITY_MS2 } from './bodies.ts';
import { baseTurn } from './chain.ts';
import { hullEdges } from './footprint.ts';
import { type MotionBounds, reaction } from './reaction.ts';
import type { ArmSpec } from './spec.ts';

/** How far a standing arm is from tipping over, or sliding, at a pose. */
export interface Tipping {
  /**
   * Restoring minus overturning moment about the edge of the footprint that it would tip over first, newton metres: below
   * 0 its own weight and the payload's turn it over.
   */
  staticNm(anglesRad: Float64Array): number;
  /**
   * The same with the reaction of joints that all accelerate as hard as they may, each the worse way, while they turn as
   * fast as they may: a bound, worse than what really comes together.
   */
  movingNm(anglesRad: Float64Array): number;
  /** Friction at the floor minus what pushes the base sideways in that motion, newtons; NaN without a friction. */
  slidingN(anglesRad: Float64Array): number;
}

/** A base that leans more than this does not stand on its footprint: it hangs, or is bolted to a wall. */
const STANDING_COSINE = Math.SQRT1_2;
/** Sideways is looked at in this many directions: a push between two of them counts for 0.4 % less. */
const DIRECTIONS = 36;

/**
 * The base's own mass counts as standing below the first axis: what its footprint reaches further out counts as bare
 * legs. Masses count as points.
 * @returns null for a base without footprint, and for one that hangs or is mounted on a wall: such a base is bolted
 */
export function tipping(spec: ArmSpec, bounds: MotionBounds): Tipping | null {
  const { footprintM, friction, massKg, tiltRad } = spec.base;
  if (footprintM === null || (baseTurn(tiltRad)[8] as number) < STANDING_COSINE) return null;
  const baseKg = massKg ?? 0;
  const edges = hullEdges(footprintM);
  const arm = reaction(spec, bounds);
  const totalKg = baseKg + arm.massKg;

  const margin = (anglesRad: Float64Array, moving: boolean): number => {
    arm.pose(anglesRad);
    let least = edges.length === 0 ? Number.NEGATIVE_INFINITY : Number.POSITIVE_INFINITY;
    for (const { px, py, ex, ey } of edges) {
      const inside =
        ex * ((arm.momentKgM[1] as number) - totalKg * py) - ey * ((arm.momentKgM[0] as number) - totalKg * px);
      // Restoring moment about the edge of a mass that the arm lifts with its acceleration: e . ((r - p) x push).
      const loss = moving ? arm.least((_x, _y, z, mx, my) => ex * (mx - py * z) + ey * (my + px * z)) : 0;
      least = Math.min(least, GRAVITY_MS2 * inside + loss);
    }
    return least;
  };

  return {
    staticNm: (anglesRad) => margin(anglesRad, false),
    movingNm: (anglesRad) => margin(anglesRad, true),
    slidingN(anglesRad) {
      if (friction === null) return Number.NaN;
      arm.pose(anglesRad);
      let loss = 0;
      for (let k = 0; k < DIRECTIONS; k++) {
        const ux = Math.cos((2 * Math.PI * k) / DIRECTIONS);
        const uy = Math.sin((2 * Math.PI * k) / DIRECTIONS);
        loss = Math.min(
          loss,
          arm.least((x, y, z) => ux * x + uy * y + friction * z),
        );
      }
      return friction * totalKg * GRAVITY_MS2 + loss;
    },
  };
}
