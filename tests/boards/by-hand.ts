/** The arithmetic of a remap as one does it on paper, for judging pulses without the project's own maps. */

type Points = readonly (readonly [number, number])[];

/** On the straight line between the two nearest of the points, or beyond the outer ones along their line. Points rise in x. */
export function straight(points: Points, x: number): number {
  const after = points.findIndex(([px], at) => at > 0 && x <= px);
  const upper = after < 0 ? points.length - 1 : after;
  const [x0, y0] = points[upper - 1] as (typeof points)[number];
  const [x1, y1] = points[upper] as (typeof points)[number];
  return y0 + ((y1 - y0) * (x - x0)) / (x1 - x0);
}

export const within = (low: number, high: number, value: number): number => Math.min(Math.max(value, low), high);
