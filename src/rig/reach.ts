export type Vector = readonly [number, number, number];

/** Longest distance from the first axis to the tip, in millimetres: all links in line. */
export function reachMm(links: readonly { readonly to_mm: Vector }[]): number {
  return links.reduce((sum, link) => sum + lengthMm(link.to_mm), 0);
}

export function lengthMm(vector: Vector): number {
  return Math.hypot(...vector);
}
