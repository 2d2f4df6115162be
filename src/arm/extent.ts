import type { ArmSpec, LinkSpec, Vec3 } from './spec.ts';

/**
 * Longest distance from the first axis to the tip, metres: all links in line. An arm whose links are offset sideways
 * falls a little short of it.
 */
export function reachM(spec: ArmSpec): number {
  return spec.links.reduce((sum, link) => sum + length(link.toM), 0);
}

/**
 * How far each joint can move each link end, in whatever pose: entry i (n + 1) + k is the most metres that end k (the
 * start of link k; n: the tip) moves for a radian of link i's joint. A joint turns its own link's end about its axis,
 * and everything beyond at most at full length.
 */
export function leversM(spec: ArmSpec): Float64Array {
  const n = spec.links.length;
  const levers = new Float64Array(n * (n + 1));
  spec.links.forEach((link, i) => {
    let sum = besideM(link.axis, link.toM);
    for (let k = i + 1; k <= n; k++) {
      levers[i * (n + 1) + k] = sum;
      if (k < n) sum += length((spec.links[k] as LinkSpec).toM);
    }
  });
  return levers;
}

/** How far a point is beside an axis through the origin. */
export function besideM([ax, ay, az]: Vec3, [x, y, z]: Vec3): number {
  return Math.hypot(ay * z - az * y, az * x - ax * z, ax * y - ay * x);
}

export function length(v: Vec3): number {
  return Math.hypot(v[0], v[1], v[2]);
}
