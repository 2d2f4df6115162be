/** A circle in a plane. */
export interface Circle {
  readonly x: number;
  readonly y: number;
  readonly radius: number;
}

/** Being outside by this share of the radius is rounding. */
const ROUNDING = 1e-12;
/** 1 / golden ratio: points are taken in an order that is as good as shuffled, and always the same. */
const STRIDE = 0.618_033_988_749_895;

/**
 * The smallest circle around points, in linear time where their order is no one's choice (E. Welzl, Smallest enclosing
 * disks, 1991; the form with three loops as in M. de Berg et al., Computational Geometry; both from memory).
 * @param points x and y in turn, at least one point
 */
export function smallestCircle(points: Float64Array): Circle {
  const n = points.length / 2;
  const order = Array.from({ length: n }, (_, k) => k).sort((a, b) => ((a * STRIDE) % 1) - ((b * STRIDE) % 1));
  const x = (k: number): number => points[2 * (order[k] as number)] as number;
  const y = (k: number): number => points[2 * (order[k] as number) + 1] as number;
  const outside = (k: number, circle: Circle): boolean =>
    Math.hypot(x(k) - circle.x, y(k) - circle.y) > circle.radius * (1 + ROUNDING);
  const between = (a: number, b: number): Circle => ({
    x: 0.5 * (x(a) + x(b)),
    y: 0.5 * (y(a) + y(b)),
    radius: 0.5 * Math.hypot(x(a) - x(b), y(a) - y(b)),
  });

  let circle: Circle = { x: x(0), y: y(0), radius: 0 };
  for (let i = 1; i < n; i++) {
    if (!outside(i, circle)) continue;
    circle = { x: x(i), y: y(i), radius: 0 };
    for (let j = 0; j < i; j++) {
      if (!outside(j, circle)) continue;
      circle = between(i, j);
      for (let k = 0; k < j; k++) {
        if (outside(k, circle)) circle = through(x(i), y(i), x(j), y(j), x(k), y(k)) ?? circle;
      }
    }
  }
  return circle;
}

/** The circle through three points; null where they lie on one line up to rounding. */
function through(ax: number, ay: number, bx: number, by: number, cx: number, cy: number): Circle | null {
  const [px, py, qx, qy] = [bx - ax, by - ay, cx - ax, cy - ay];
  const cross = 2 * (px * qy - py * qx);
  const p = px * px + py * py;
  const q = qx * qx + qy * qy;
  if (Math.abs(cross) <= ROUNDING * Math.max(p, q)) return null;
  const ux = (qy * p - py * q) / cross;
  const uy = (px * q - qx * p) / cross;
  return { x: ax + ux, y: ay + uy, radius: Math.hypot(ux, uy) };
}
