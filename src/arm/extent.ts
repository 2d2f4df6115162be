import type { ArmSpec, LinkSpec, Vec3 } from './spec.ts';

/** Longest distance from the first axis to the tip, metres. */
export function reachM(spec: ArmSpec): number {
  return spec.links.reduce((sum, link) => sum + length(link.toM), 0);
}

/**
 * For each link, the longest distance from its axis to any link end beyond it, metres, in whatever pose: a turn of
 * that joint by dq moves no link end further than this times dq.
 */
export function leversM(spec: ArmSpec): Float64Array {
  const levers = new Float64Array(spec.links.length);
  let beyond = 0;
  for (let i = spec.links.length - 1; i >= 0; i--) {
    beyond += length((spec.links[i] as LinkSpec).toM);
    levers[i] = beyond;
  }
  return levers;
}

export function length(v: Vec3): number {
  return Math.hypot(v[0], v[1], v[2]);
}
