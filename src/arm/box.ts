import type { KeepOut } from './spec.ts';

export type Box = Extract<KeepOut, { kind: 'box' }>;

/** Nearer than this is touching, metres: arms may touch a keep-out, and rounding must not trap one that does. */
export const TOUCHING_M = 1e-9;

/** Depth is told to this many halvings of the box's half width. */
const DEPTH_STEPS = 14;
/** The nearest place of a link is found to 1/4096 of its length; the distance there is flat, so its error is far smaller. */
const NEAREST_STEPS = 12;

/** True when a link (the line from at[3 link..] to the next end) passes through the box shrunk on every side: slab test. */
export function enters(at: Float64Array, link: number, box: Box, shrinkM: number): boolean {
  let enter = 0;
  let leave = 1;
  for (let k = 0; k < 3; k++) {
    const from = at[3 * link + k] as number;
    const along = (at[3 * link + 3 + k] as number) - from;
    const low = (box.minM[k] as number) + shrinkM - from;
    const high = (box.maxM[k] as number) - shrinkM - from;
    if (low >= high) return false;
    if (along === 0) {
      if (low >= 0 || high <= 0) return false;
      continue;
    }
    enter = Math.max(enter, Math.min(low / along, high / along));
    leave = Math.min(leave, Math.max(low / along, high / along));
    if (enter >= leave) return false;
  }
  return true;
}

/** out[i] = how far the box has to shrink on every side to free a link; 0 for one that is outside or touches. */
export function depthIn(at: Float64Array, link: number, box: Box, out: Float64Array, i: number): void {
  out[i] = 0;
  if (!enters(at, link, box, TOUCHING_M)) return;
  let low = 0;
  let high = 0.5 * Math.min(width(box, 0), width(box, 1), width(box, 2));
  for (let step = 0; step < DEPTH_STEPS; step++) {
    const middle = 0.5 * (low + high);
    if (enters(at, link, box, middle)) low = middle;
    else high = middle;
  }
  out[i] = high;
}

/** out[0] = distance from a link to a box it is outside of: convex along the link, so its slope is bisected. */
export function distanceTo(at: Float64Array, link: number, box: Box, out: Float64Array): void {
  let low = 0;
  let high = 1;
  for (let step = 0; step < NEAREST_STEPS; step++) {
    const middle = 0.5 * (low + high);
    let slope = 0;
    for (let k = 0; k < 3; k++) {
      const along = (at[3 * link + 3 + k] as number) - (at[3 * link + k] as number);
      slope += along * beyond((at[3 * link + k] as number) + middle * along, box, k);
    }
    if (slope > 0) high = middle;
    else low = middle;
  }
  const t = 0.5 * (low + high);
  let square = 0;
  for (let k = 0; k < 3; k++) {
    const along = (at[3 * link + 3 + k] as number) - (at[3 * link + k] as number);
    const gap = beyond((at[3 * link + k] as number) + t * along, box, k);
    square += gap * gap;
  }
  out[0] = Math.sqrt(square);
}

/** True where a link, each of whose points stays within marginM[link + 1] of where it is, cannot reach the box. */
export function clearBy(at: Float64Array, link: number, box: Box, marginM: Float64Array): boolean {
  const margin = marginM[link + 1] as number;
  for (let k = 0; k < 3; k++) {
    const a = at[3 * link + k] as number;
    const b = at[3 * link + 3 + k] as number;
    if (Math.min(a, b) - margin >= (box.maxM[k] as number)) return true;
    if (Math.max(a, b) + margin <= (box.minM[k] as number)) return true;
  }
  return false;
}

/** What `staysOut` is asked: see there. One at a time is enough. */
const room = new Float64Array(3);

/**
 * True where a link surely stays outside the box on its way between two looks: some plane has the box on one side and
 * the link on the other at both looks, and its ends, which go straight but for a bulge of bulgeM[link + 1], do not bend
 * through it. A box and a line that are apart are parted by a face of the box or by a plane along the line and one of its
 * edges (separating axes: S. Gottschalk, M. C. Lin, D. Manocha, OBBTree, SIGGRAPH 1996; from memory).
 */
export function passesBy(
  before: Float64Array,
  after: Float64Array,
  link: number,
  box: Box,
  bulgeM: Float64Array,
): boolean {
  room[2] = bulgeM[link + 1] as number;
  for (let k = 0; k < 3; k++) {
    const a0 = before[3 * link + k] as number;
    const a1 = before[3 * link + 3 + k] as number;
    const b0 = after[3 * link + k] as number;
    const b1 = after[3 * link + 3 + k] as number;
    room[0] = Math.min(a0, a1) - (box.maxM[k] as number);
    room[1] = Math.min(b0, b1) - (box.maxM[k] as number);
    if (staysOut(room)) return true;
    room[0] = (box.minM[k] as number) - Math.max(a0, a1);
    room[1] = (box.minM[k] as number) - Math.max(b0, b1);
    if (staysOut(room)) return true;
  }
  for (let k = 0; k < 3; k++) {
    if (partedAlong(before, after, link, box, k) || partedAlong(after, before, link, box, k)) return true;
  }
  return false;
}

/** True where the plane along the link as in `one`, and along the box's edge k, has link and box apart at both looks. */
function partedAlong(one: Float64Array, other: Float64Array, link: number, box: Box, k: number): boolean {
  const p = (k + 1) % 3;
  const q = (k + 2) % 3;
  const o = 3 * link;
  const up = (one[o + 3 + p] as number) - (one[o + p] as number);
  const uq = (one[o + 3 + q] as number) - (one[o + q] as number);
  const length = Math.sqrt(up * up + uq * uq);
  if (length === 0) return false;
  const np = uq / length;
  const nq = -up / length;
  const cp = 0.5 * ((box.minM[p] as number) + (box.maxM[p] as number));
  const cq = 0.5 * ((box.minM[q] as number) + (box.maxM[q] as number));
  const wp = (box.maxM[p] as number) - (box.minM[p] as number);
  const wq = (box.maxM[q] as number) - (box.minM[q] as number);
  const radius = 0.5 * (wp * Math.abs(np) + wq * Math.abs(nq));
  const from = np * ((one[o + p] as number) - cp) + nq * ((one[o + q] as number) - cq);
  const side = from < 0 ? -1 : 1;
  const to0 = side * (np * ((other[o + p] as number) - cp) + nq * ((other[o + q] as number) - cq));
  const to1 = side * (np * ((other[o + 3 + p] as number) - cp) + nq * ((other[o + 3 + q] as number) - cq));
  room[0] = side * from - radius;
  room[1] = Math.min(to0, to1) - radius;
  return staysOut(room);
}

/**
 * True where a height that is a = ask[0] first and b = ask[1] last, and between them lies no further than 4 bulge r (1 - r)
 * below the straight line (bulge = ask[2]), never goes under 0: a (1 - r) + b r - 4 bulge r (1 - r) >= 0 for all r just
 * when sqrt a + sqrt b >= 2 sqrt bulge.
 */
export function staysOut(ask: Float64Array): boolean {
  const a = ask[0] as number;
  const b = ask[1] as number;
  if (!(a >= -TOUCHING_M && b >= -TOUCHING_M)) return false;
  const from = Math.max(a, 0);
  const to = Math.max(b, 0);
  return from + to + 2 * Math.sqrt(from * to) >= 4 * (ask[2] as number);
}

/** How far a coordinate is past the box's side, with its sign; 0 between the sides. */
function beyond(value: number, box: Box, k: number): number {
  const low = box.minM[k] as number;
  const high = box.maxM[k] as number;
  return value < low ? value - low : value > high ? value - high : 0;
}

function width(box: Box, k: number): number {
  return (box.maxM[k] as number) - (box.minM[k] as number);
}
