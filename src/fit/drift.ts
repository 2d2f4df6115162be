import { fisherTail } from './distributions.ts';
import { polynomials } from './least-squares.ts';

/** How a map that stands in a profile agrees with new points. */
export interface Drift {
  readonly drifted: boolean;
  /** New angle less the map's, in the middle of the new points, degrees. */
  readonly shiftDeg: number;
  /** How much further the joint turns over the points than the map says, percent; null: too few points to tell. */
  readonly stretchPercent: number | null;
  /** Largest disagreement, degrees. */
  readonly worstDeg: number;
  readonly n: number;
}

/** Chance that scatter alone is called drift. */
const CHANCE = 0.01;
/** Less is no drift that anybody would mend, degrees (common practice, no source). */
const MATTERS_DEG = 0.5;

/**
 * Tests whether known angles less the map's are zero but for scatter: their mean, and from three points on their slope too.
 * @param mapDeg what the map says
 * @param knownDeg what was measured
 * @param allowedDeg what the map is uncertain by itself, from when it was fitted; with one or two points this decides alone
 */
export function driftOf(mapDeg: readonly number[], knownDeg: readonly number[], allowedDeg: number): Drift {
  const n = mapDeg.length;
  const off = knownDeg.map((known, i) => known - (mapDeg[i] as number));
  const fits = polynomials(mapDeg, off, 1);
  const line = fits[1];
  const middle = (Math.min(...mapDeg) + Math.max(...mapDeg)) / 2;
  const shiftDeg = line?.value(middle) ?? off.reduce((sum, each) => sum + each, 0) / n;
  const worstDeg = Math.max(...off.map(Math.abs));
  const most = Math.max(allowedDeg, MATTERS_DEG);
  const common = { shiftDeg, worstDeg, n };
  if (line === undefined || line.dof < 1) {
    return { ...common, drifted: worstDeg > most, stretchPercent: null };
  }
  const span = Math.max(...mapDeg) - Math.min(...mapDeg);
  const bent = Math.max(...[Math.min(...mapDeg), Math.max(...mapDeg)].map((end) => Math.abs(line.value(end))));
  const squares = off.reduce((sum, each) => sum + each * each, 0);
  const f = (squares - line.squares) / 2 / (line.squares / line.dof);
  return {
    ...common,
    drifted: bent > most && fisherTail(f, 2, line.dof) < CHANCE,
    stretchPercent: span > 0 ? 100 * line.slope(middle) : null,
  };
}
