import type { LeaderSpec } from './spec.ts';

/** Things worth a word that hold nothing back. */
export interface Notices {
  /** 1 while a joint has read exactly the same for long although others moved. */
  readonly frozen: Uint8Array;
  /** All channels have scaled together: the pots' supply has sagged or risen, as a ratio; 1 when not. */
  readonly supplyRatio: Float64Array;
  /** @param counts one value a joint, NaN when it did not come */
  push(tUs: number, counts: Float64Array): void;
}

const FROZEN_US = 10_000_000;
/** A live converter flickers; a joint is called moving past this many counts, as a share of its travel. */
const MOVED_SHARE = 0.05;
/** A hand cannot turn three joints by the very same factor within a reading; a supply can. */
const SAG_JOINTS_MIN = 3;
const SAG_SHARE_MIN = 0.03;
const SAG_SPREAD_MAX = 0.005;

export function notices(spec: LeaderSpec): Notices {
  const n = spec.joints.length;
  const frozen = new Uint8Array(n);
  const supplyRatio = new Float64Array([1]);
  const before = new Float64Array(n).fill(Number.NaN);
  const changedUs = new Float64Array(n).fill(Number.NaN);
  const anchor = new Float64Array(n).fill(Number.NaN);
  const movedUs = new Float64Array([Number.NEGATIVE_INFINITY]);
  const moved = Float64Array.from(spec.joints, (j) => MOVED_SHARE * (j.travelMax - j.travelMin));

  const commonRatio = (counts: Float64Array): number => {
    let low = Number.POSITIVE_INFINITY;
    let high = 0;
    let heard = 0;
    for (let j = 0; j < n; j++) {
      const ratio = (counts[j] as number) / (before[j] as number);
      if (!(ratio > 0) || !Number.isFinite(ratio)) continue;
      heard++;
      low = Math.min(low, ratio);
      high = Math.max(high, ratio);
    }
    const together = heard >= SAG_JOINTS_MIN && high - low <= SAG_SPREAD_MAX;
    return together && Math.abs(low - 1) >= SAG_SHARE_MIN ? 0.5 * (low + high) : 1;
  };

  return {
    frozen,
    supplyRatio,
    push(tUs, counts) {
      const ratio = commonRatio(counts);
      // The way back from a sag shows as the inverse ratio: the two cancel.
      if (ratio !== 1) {
        const total = (supplyRatio[0] as number) * ratio;
        supplyRatio[0] = Math.abs(total - 1) < SAG_SHARE_MIN ? 1 : total;
      }
      for (let j = 0; j < n; j++) {
        const value = counts[j] as number;
        if (Number.isNaN(value)) continue;
        if (value !== before[j]) {
          before[j] = value;
          changedUs[j] = tUs;
        }
        if (!(Math.abs(value - (anchor[j] as number)) <= (moved[j] as number))) {
          if (!Number.isNaN(anchor[j] as number)) movedUs[0] = tUs;
          anchor[j] = value;
        }
        const still = tUs - (changedUs[j] as number) >= FROZEN_US;
        frozen[j] = still && (movedUs[0] as number) > (changedUs[j] as number) ? 1 : 0;
      }
    },
  };
}
