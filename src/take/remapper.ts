import { remap } from '../follower/remap.ts';
import type { FollowerSpec } from '../follower/spec.ts';
import { tipWish } from '../follower/tip-wish.ts';

/** What a follower is asked for at a leader's pose: its remap, inside its ranges. The result is reused. */
export function remapper(spec: FollowerSpec): (leaderRad: Float64Array) => Float64Array {
  const map = remap([spec]);
  const tip = spec.whole?.tip ? tipWish(spec.whole, spec.whole.tip, spec.joints) : null;
  const rows = { from: 0, to: spec.joints.length };
  const out = new Float64Array(spec.joints.length);
  return (leaderRad) => {
    map.mix(rows, leaderRad);
    out.set(map.askedRad);
    tip?.reach(leaderRad, out);
    spec.joints.forEach(({ minRad, maxRad }, j) => {
      out[j] = Math.min(Math.max(out[j] as number, minRad), maxRad);
    });
    return out;
  };
}
