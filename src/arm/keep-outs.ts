import { clearBy, depthIn, distanceTo, enters, passesBy, staysOut, TOUCHING_M } from './box.ts';
import type { Chain } from './chain.ts';
import type { KeepOut } from './spec.ts';

/**
 * Whether an arm stays out of where it must not be. Links are the straight lines between their ends: how thick they are
 * is not known here, so a keep-out is larger by that much, see `clearance_mm`. Link ends are given as in `Chain.at`.
 */
export interface KeepOuts {
  readonly some: boolean;
  /**
   * out[0] = distance from the chain's present pose to the nearest keep-out, metres; where a link is inside one, minus
   * the depth by which that keep-out would have to shrink to free it.
   */
  clearance(chain: Chain, out: Float64Array): void;
  /** Says where a motion begins: a link that is inside a keep-out already may leave it, but not go deeper. */
  begin(at: Float64Array): void;
  /** True unless every end k could move marginM[k] in any direction without touching anything. */
  near(at: Float64Array, marginM: Float64Array): boolean;
  /**
   * True unless every link surely stays out of what it was not in at `begin`, on its way between two looks.
   * @param bulgeM how far end k may be beside the straight line between its two places
   */
  entered(before: Float64Array, after: Float64Array, bulgeM: Float64Array): boolean;
}

/** @param places in the base's level frame, metres */
export function keepOuts(places: readonly KeepOut[]): KeepOuts {
  const depth = new Float64Array(places.length);
  const floorM = Float64Array.from(places, (place) => (place.kind === 'below' ? place.zM : Number.NEGATIVE_INFINITY));
  const one = new Float64Array(1);
  const room = new Float64Array(3);
  let links = 0;

  const depthAt = (at: Float64Array, place: KeepOut, p: number, fixedToo: boolean): void => {
    depth[p] = 0;
    if (place.kind === 'below') {
      // The first axis does not move: a motion cannot be blamed for where it is.
      for (let k = fixedToo ? 0 : 1; k <= links; k++) {
        depth[p] = Math.max(depth[p] as number, (floorM[p] as number) - (at[3 * k + 2] as number));
      }
    } else {
      for (let i = 0; i < links; i++) {
        depthIn(at, i, place, one, 0);
        depth[p] = Math.max(depth[p] as number, one[0] as number);
      }
    }
    if ((depth[p] as number) <= TOUCHING_M) depth[p] = 0;
  };

  /** What stands on a floor is not near it: the first axis does not count. */
  const distance = (at: Float64Array, place: KeepOut, p: number): number => {
    let nearest = Number.POSITIVE_INFINITY;
    for (let i = 0; i < links; i++) {
      if (place.kind === 'box') distanceTo(at, i, place, one);
      else one[0] = (at[3 * i + 5] as number) - (floorM[p] as number);
      nearest = Math.min(nearest, one[0] as number);
    }
    return nearest;
  };

  const belowEntered = (b: Float64Array, a: Float64Array, p: number, bulgeM: Float64Array): boolean => {
    const deep = depth[p] as number;
    for (let k = 1; k <= links; k++) {
      room[0] = (b[3 * k + 2] as number) - (floorM[p] as number);
      room[1] = (a[3 * k + 2] as number) - (floorM[p] as number);
      room[2] = bulgeM[k] as number;
      // From inside: no deeper, at every look.
      if (deep > 0 ? (room[1] as number) < -deep - TOUCHING_M : !staysOut(room)) return true;
    }
    return false;
  };

  return {
    some: places.length > 0,
    clearance(chain, out) {
      links = chain.links;
      let least = Number.POSITIVE_INFINITY;
      for (let p = 0; p < places.length; p++) {
        const place = places[p] as KeepOut;
        depthAt(chain.at, place, p, true);
        least = Math.min(least, (depth[p] as number) > 0 ? -(depth[p] as number) : distance(chain.at, place, p));
      }
      out[0] = least;
    },
    begin(at) {
      links = at.length / 3 - 1;
      for (let p = 0; p < places.length; p++) depthAt(at, places[p] as KeepOut, p, false);
    },
    near(at, marginM) {
      for (let p = 0; p < places.length; p++) {
        const place = places[p] as KeepOut;
        for (let k = 1; k <= links; k++) {
          if (
            place.kind === 'below'
              ? (at[3 * k + 2] as number) - (marginM[k] as number) < (floorM[p] as number)
              : !clearBy(at, k - 1, place, marginM)
          )
            return true;
        }
      }
      return false;
    },
    entered(before, after, bulgeM) {
      for (let p = 0; p < places.length; p++) {
        const place = places[p] as KeepOut;
        const deep = depth[p] as number;
        if (place.kind === 'below') {
          if (belowEntered(before, after, p, bulgeM)) return true;
          continue;
        }
        for (let i = 0; i < links; i++) {
          if (deep > 0 ? enters(after, i, place, deep) : !passesBy(before, after, i, place, bulgeM)) return true;
        }
      }
      return false;
    },
  };
}
