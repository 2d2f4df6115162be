import { type Dwell, medianOf } from './dwells.ts';
import type { Stretch } from './track.ts';

export interface Hysteresis {
  readonly counts: number;
  /** What a hand is off by when it stands at one place twice: standard error of the difference. */
  readonly wobbleCounts: number;
  /** Larger than the hand's own wobble explains. */
  readonly seen: boolean;
}

/** Dwells this near to each other are one place. */
const PLACE_SHARE = 0.04;
const SEEN_SIGMAS = 2.5;

/** Dwells at one place that were come to from both sides. The ends are stops: they are met from one side only. */
export function hysteresisOf(dwells: readonly Dwell[], [low, high]: Stretch, noise: number): Hysteresis | null {
  const near = PLACE_SHARE * (high - low);
  const inside = dwells.filter(({ counts }) => counts > low + near && counts < high - near);
  const ups = inside.filter(({ came }) => came === 1);
  const downs = inside.filter(({ came }) => came === -1);
  const differences: number[] = [];
  for (const up of ups) {
    const same = downs.filter(({ counts }) => Math.abs(counts - up.counts) <= near);
    if (same.length > 0) differences.push(up.counts - medianOf(same.map(({ counts }) => counts)));
  }
  if (differences.length === 0) return null;
  const counts = differences.reduce((sum, d) => sum + d, 0) / differences.length;
  const wobble = wobbleOf([ups, downs, ends(dwells, low, near), ends(dwells, high, near)], near) ?? noise;
  const wobbleCounts = (Math.max(wobble, noise / 3) * Math.SQRT2) / Math.sqrt(differences.length);
  return { counts, wobbleCounts, seen: Math.abs(counts) > SEEN_SIGMAS * wobbleCounts };
}

function ends(dwells: readonly Dwell[], end: number, near: number): readonly Dwell[] {
  return dwells.filter(({ counts }) => Math.abs(counts - end) <= near);
}

/** How far dwells at one place, come to from one side, lie apart: the hand's part, free of hysteresis. */
function wobbleOf(groups: readonly (readonly Dwell[])[], near: number): number | null {
  let squares = 0;
  let dof = 0;
  for (const group of groups) {
    for (const place of places(group, near)) {
      const mean = place.reduce((sum, { counts }) => sum + counts, 0) / place.length;
      squares += place.reduce((sum, { counts }) => sum + (counts - mean) ** 2, 0);
      dof += place.length - 1;
    }
  }
  return dof > 0 ? Math.sqrt(squares / dof) : null;
}

function places(dwells: readonly Dwell[], near: number): readonly (readonly Dwell[])[] {
  const groups: Dwell[][] = [];
  for (const dwell of dwells.toSorted((a, b) => a.counts - b.counts)) {
    const group = groups.at(-1);
    if (group !== undefined && dwell.counts - (group[0] as Dwell).counts <= near) group.push(dwell);
    else groups.push([dwell]);
  }
  return groups;
}
