/** A side of what an arm can tip over: a point on it and its direction, with the inside to its left. */
export interface Edge {
  readonly px: number;
  readonly py: number;
  readonly ex: number;
  readonly ey: number;
}

type Corner = readonly [number, number];

/**
 * Sides of the convex hull of a footprint, anticlockwise seen from above: whatever its outline, an arm tips over the hull.
 * Monotone chain (A. M. Andrew, Information Processing Letters 9 (1979) 216-219; from memory).
 * @returns none where the corners lie on one line
 */
export function hullEdges(footprintM: readonly Corner[]): readonly Edge[] {
  const corners = [...footprintM].sort((a, b) => a[0] - b[0] || a[1] - b[1]);
  const hull = [...halfHull(corners), ...halfHull(corners.reverse())];
  if (hull.length < 3) return [];
  return hull.map(([px, py], i) => {
    const [qx, qy] = hull[(i + 1) % hull.length] as Corner;
    const length = Math.hypot(qx - px, qy - py);
    return { px, py, ex: (qx - px) / length, ey: (qy - py) / length };
  });
}

/** The lower side of sorted corners, without the last of them; of reversed ones, the upper side. */
function halfHull(corners: readonly Corner[]): Corner[] {
  const half: Corner[] = [];
  for (const corner of corners) {
    while (half.length > 1 && !turnsLeft(half.at(-2) as Corner, half.at(-1) as Corner, corner)) half.pop();
    half.push(corner);
  }
  half.pop();
  return half;
}

function turnsLeft(a: Corner, b: Corner, c: Corner): boolean {
  return (b[0] - a[0]) * (c[1] - a[1]) - (b[1] - a[1]) * (c[0] - a[0]) > 0;
}
