import type { Chain } from './chain.ts';
import type { KeepOut } from './spec.ts';

/**
 * Whether an arm stays out of where it must not be. Links are the straight lines between their ends: how thick they are
 * is not known here, so a keep-out is drawn with the links' thickness in mind.
 */
export interface KeepOuts {
  readonly some: boolean;
  /** True when every link of the chain's present pose is at least `marginM[0]` metres clear (a negative margin: that deep). */
  clear(chain: Chain, marginM: Float64Array): boolean;
  /** How far the deepest link is inside, metres; 0 when all are clear. */
  depth(chain: Chain): number;
}

/** Depth is told to this many halvings of `DEEPEST_M`: 0.2 mm. */
const DEPTH_STEPS = 14;
const DEEPEST_M = 4;

/** @param places in the base's level frame, metres */
export function keepOuts(places: readonly KeepOut[]): KeepOuts {
  const margin = new Float64Array(1);
  const clear = (chain: Chain, marginM: Float64Array): boolean => {
    for (const place of places) {
      for (let i = 0; i < chain.links; i++) {
        if (place.kind === 'below' ? under(chain.at, i, place.zM, marginM) : enters(chain.at, i, place, marginM))
          return false;
      }
    }
    return true;
  };
  return {
    some: places.length > 0,
    clear,
    depth(chain) {
      margin[0] = 0;
      if (clear(chain, margin)) return 0;
      let low = 0;
      let high = DEEPEST_M;
      for (let step = 0; step < DEPTH_STEPS; step++) {
        const middle = 0.5 * (low + high);
        margin[0] = -middle;
        if (clear(chain, margin)) high = middle;
        else low = middle;
      }
      return high;
    },
  };
}

function under(at: Float64Array, link: number, zM: number, marginM: Float64Array): boolean {
  const lowest = Math.min(at[3 * link + 2] as number, at[3 * link + 5] as number);
  return lowest < zM + (marginM[0] as number);
}

/** Slab test of a link against the box grown by the margin on every side. */
function enters(
  at: Float64Array,
  link: number,
  box: Extract<KeepOut, { kind: 'box' }>,
  marginM: Float64Array,
): boolean {
  const margin = marginM[0] as number;
  let enter = 0;
  let leave = 1;
  for (let k = 0; k < 3; k++) {
    const from = at[3 * link + k] as number;
    const along = (at[3 * link + 3 + k] as number) - from;
    const low = (box.minM[k] as number) - margin - from;
    const high = (box.maxM[k] as number) + margin - from;
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
