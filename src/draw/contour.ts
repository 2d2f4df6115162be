/** Outlines of what is marked on a grid. */

export type Point = readonly [number, number];

/**
 * Closed lines around the cells that are set, by marching squares on cell centres (W. E. Lorensen, H. E. Cline,
 * SIGGRAPH 1987, in two dimensions; from memory). Holes get lines of their own.
 * @param cells `rows` rows of `columns` values, 0 to 1; the outermost ones must be 0
 * @param level what counts as inside is more than this
 * @returns points in units of cells, x along columns and y along rows
 */
export function contours(
  cells: Float64Array,
  columns: number,
  rows: number,
  level: number,
): readonly (readonly Point[])[] {
  const value = (x: number, y: number): number => cells[y * columns + x] as number;
  /** Where each crossing leads to, both told by the edge of the grid they lie on. */
  const next = new Map<number, number>();
  const at = new Map<number, Point>();
  const crossing = (x0: number, y0: number, x1: number, y1: number): number => {
    const horizontal = y0 === y1;
    const key = 2 * (Math.min(y0, y1) * columns + Math.min(x0, x1)) + (horizontal ? 0 : 1);
    const share = (level - value(x0, y0)) / (value(x1, y1) - value(x0, y0));
    at.set(key, [x0 + share * (x1 - x0), y0 + share * (y1 - y0)]);
    return key;
  };
  for (let y = 0; y + 1 < rows; y++) {
    for (let x = 0; x + 1 < columns; x++) {
      const corners = [
        [x, y],
        [x + 1, y],
        [x + 1, y + 1],
        [x, y + 1],
      ] as const;
      const inside = corners.map(([cx, cy]) => value(cx, cy) > level);
      // Going round a square, the line leaves where the inside begins and enters where it ended: inside on its right.
      const begins: number[] = [];
      const ends: number[] = [];
      for (let c = 0; c < 4; c++) {
        const [from, to] = [corners[c], corners[(c + 1) % 4]] as [Point, Point];
        if (inside[c] === inside[(c + 1) % 4]) continue;
        (inside[c] === true ? ends : begins).push(crossing(from[0], from[1], to[0], to[1]));
      }
      // Of two crossings each, in a saddle, the inside is split: each end goes back to the begin before it.
      for (const [i, end] of ends.entries()) {
        const begin = begins[inside[0] === true ? (i + begins.length - 1) % begins.length : i];
        if (begin !== undefined) next.set(end, begin);
      }
    }
  }
  return rings(next, at);
}

function rings(next: Map<number, number>, at: ReadonlyMap<number, Point>): readonly (readonly Point[])[] {
  const found: Point[][] = [];
  for (const start of [...next.keys()]) {
    const ring: Point[] = [];
    let key: number | undefined = start;
    while (key !== undefined && next.has(key)) {
      ring.push(at.get(key) as Point);
      const to: number = next.get(key) as number;
      next.delete(key);
      key = to;
    }
    if (ring.length > 2) found.push(ring);
  }
  return found;
}

/**
 * A ring with the points left out that stray less than `tolerance` from the line without them (D. H. Douglas,
 * T. K. Peucker, Cartographica 10 (1973) 112-122; from memory).
 */
export function simplified(ring: readonly Point[], tolerance: number): readonly Point[] {
  const first = ring[0];
  if (first === undefined) return ring;
  // A ring has no ends: it is cut at its first point and the one farthest from that.
  const far = farthest(ring, (point) => Math.hypot(point[0] - first[0], point[1] - first[1])).index;
  const out = [
    ...reduced(ring.slice(0, far + 1), tolerance),
    ...reduced([...ring.slice(far), first], tolerance).slice(1),
  ];
  return out.slice(0, -1);
}

function reduced(line: readonly Point[], tolerance: number): readonly Point[] {
  const keep = new Uint8Array(line.length);
  keep[0] = keep[line.length - 1] = 1;
  const spans: [number, number][] = [[0, line.length - 1]];
  for (let span = spans.pop(); span !== undefined; span = spans.pop()) {
    const [from, to] = span;
    const [a, b] = [line[from], line[to]] as [Point, Point];
    const { index, distance } = farthest(line.slice(from, to + 1), (point) => fromLine(point, a, b));
    if (distance <= tolerance || index === 0 || index === to - from) continue;
    keep[from + index] = 1;
    spans.push([from, from + index], [from + index, to]);
  }
  return line.filter((_, i) => keep[i] === 1);
}

function farthest(points: readonly Point[], measure: (point: Point) => number): { index: number; distance: number } {
  let index = 0;
  let distance = -1;
  for (const [i, point] of points.entries()) {
    const here = measure(point);
    if (here <= distance) continue;
    index = i;
    distance = here;
  }
  return { index, distance };
}

/** Distance of a point from the stretch between two others. */
function fromLine(point: Point, a: Point, b: Point): number {
  const [dx, dy] = [b[0] - a[0], b[1] - a[1]];
  const length = dx * dx + dy * dy;
  const share = length === 0 ? 0 : Math.max(0, Math.min(1, ((point[0] - a[0]) * dx + (point[1] - a[1]) * dy) / length));
  return Math.hypot(point[0] - a[0] - share * dx, point[1] - a[1] - share * dy);
}
