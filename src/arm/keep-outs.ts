import type { Chain } from './chain.ts';
import type { KeepOut } from './spec.ts';

/**
 * Whether an arm stays out of where it must not be. Links are the straight lines between their ends: how thick they are
 * is not known here, so a keep-out is drawn with the links' thickness in mind.
 */
export interface KeepOuts {
  readonly some: boolean;
  /**
   * out[0] = distance from the chain's present pose to the nearest keep-out, metres; where a link is inside one, minus
   * the depth by which all keep-outs would have to shrink to free it.
   */
  clearance(chain: Chain, out: Float64Array): void;
}

type Box = Extract<KeepOut, { kind: 'box' }>;

/** Depth is told to this many halvings of `DEEPEST_M`: a quarter of a millimetre. */
const DEPTH_STEPS = 14;
const DEEPEST_M = 4;
/** The nearest place of a link is found to 1/4096 of its length; the distance there is flat, so its error is far smaller. */
const NEAREST_STEPS = 12;

/** @param places in the base's level frame, metres */
export function keepOuts(places: readonly KeepOut[]): KeepOuts {
  const near = new Float64Array(1);

  const inside = (chain: Chain, shrinkM: number): boolean => {
    for (const place of places) {
      for (let i = 0; i < chain.links; i++) {
        if (place.kind === 'below' ? lowest(chain.at, i) < place.zM - shrinkM : enters(chain.at, i, place, shrinkM))
          return true;
      }
    }
    return false;
  };

  const depth = (chain: Chain): number => {
    let low = 0;
    let high = DEEPEST_M;
    for (let step = 0; step < DEPTH_STEPS; step++) {
      const middle = 0.5 * (low + high);
      if (inside(chain, middle)) low = middle;
      else high = middle;
    }
    return high;
  };

  return {
    some: places.length > 0,
    clearance(chain, out) {
      if (inside(chain, 0)) {
        out[0] = -depth(chain);
        return;
      }
      let nearest = Number.POSITIVE_INFINITY;
      for (const place of places) {
        for (let i = 0; i < chain.links; i++) {
          if (place.kind === 'below') near[0] = lowest(chain.at, i) - place.zM;
          else distance(chain.at, i, place, near);
          nearest = Math.min(nearest, near[0] as number);
        }
      }
      out[0] = nearest;
    },
  };
}

function lowest(at: Float64Array, link: number): number {
  return Math.min(at[3 * link + 2] as number, at[3 * link + 5] as number);
}

/** out[0] = distance from a link to a box it is outside of: convex along the link, so its slope is bisected. */
function distance(at: Float64Array, link: number, box: Box, out: Float64Array): void {
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

/** How far a coordinate is past the box's side, with its sign; 0 between the sides. */
function beyond(value: number, box: Box, k: number): number {
  const low = box.minM[k] as number;
  const high = box.maxM[k] as number;
  return value < low ? value - low : value > high ? value - high : 0;
}

/** Slab test of a link against the box shrunk on every side. */
function enters(at: Float64Array, link: number, box: Box, shrinkM: number): boolean {
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
