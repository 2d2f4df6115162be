/**
 * A slow estimate of how warm holding makes a motor: its current goes with its torque and its heat with the square of
 * that, and it warms and cools as a single body does.
 */
export interface Heat {
  /**
   * One value a joint, 0 to 1: 1 is as warm as holding at its limit for ever would make it, or warmer.
   */
  readonly warmth: Float64Array;
  /**
   * @param shares torque of each joint against what its motor may hold; NaN (no motor known) leaves it as it is
   * @param dtS 1 value, seconds
   */
  step(shares: Float64Array, dtS: Float64Array): void;
}

/** A hobby servo's case takes minutes to warm: common practice, no source. */
export const HEAT_TIME_S = 180;

export function heat(joints: number, timeS: number = HEAT_TIME_S): Heat {
  const warmth = new Float64Array(joints);
  return {
    warmth,
    step(shares, dtS) {
      const kept = Math.exp(-(dtS[0] as number) / timeS);
      for (let j = 0; j < joints; j++) {
        const share = shares[j] as number;
        if (Number.isNaN(share)) continue;
        const goal = share * share;
        warmth[j] = Math.min(1, goal + ((warmth[j] as number) - goal) * kept);
      }
    },
  };
}
