import { factor, solve } from './cholesky.ts';
import type { TipMotion } from './tip-motion.ts';

/**
 * What an arm that has joints to spare does with them: a step that leaves the tip where it is and brings the joints
 * nearer to a pose, and before that the last link nearer to a pitch. Near a singular pose the tip gives way a little
 * instead: the projector is damped (Y. Nakamura, H. Hanafusa, J. Dyn. Sys. Meas. Control 108 (1986) 163-171; from
 * memory). It is Newton's step for q - prefer under the condition that the tip stays, with the condition's bend in it:
 * without that, the step runs to and fro where the free motion is a small loop, as it is close to the edge of reach.
 */
export interface Settling {
  /**
   * Fills `step`, radians for each column of the tip's motion, at its present look. Joints at an end of their range are
   * left where they are if the step would push them out, and the others settle without them.
   * @param pitchRad 1 value; NaN: no pitch is asked for
   */
  settle(
    anglesRad: Float64Array,
    preferRad: Float64Array,
    pitchRad: Float64Array,
    minRad: Float64Array,
    maxRad: Float64Array,
    step: Float64Array,
  ): void;
}

/** Directions in which the tip moves by less than this share of the reach a radian are free as well. */
const SINGULAR = 0.003;
const DAMPING = SINGULAR * SINGULAR;
/** How little the wish counts against the target, where both are in the second derivative: squared shares of the reach. */
const WISH = 1e-4;
/** How much more a radian of pitch counts than a radian away from the pose, and how hard the pitch pulls at most. */
const PITCH_WEIGHT = 100;
const PITCH_PULL_MAX = 10;
/** Applied twice, so that the damped projector leaks in proportion to the fourth power of what is singular. */
const PASSES = 2;
/** Shares of the sharpest bend there may be that the step allows for: at first, and where that was not enough. */
const BEND = 0.5;
const BEND_MOST = 3;

/** A joint this near to an end is at it, radians: else it would be now free, now held, and the others with it. */
const AT_END_RAD = 1e-6;

export function settling(tip: TipMotion): Settling {
  const { joints, error, jacobian } = tip;
  const m = joints.length;
  const free = new Uint8Array(m);
  const column = new Uint8Array(m);
  const slope = new Float64Array(m);
  const gram = new Float64Array(9);
  /** What holds the tip against the wish's slope, and the same while projecting. */
  const hold = new Float64Array(3);
  const scratch = new Float64Array(3);
  const along = new Float64Array(3);
  /** How hard the pitch pulls, with its sign: it bends the wish by that much of its own bend. */
  const pitchPull = new Float64Array(1);
  const pitchWeight = new Float64Array(1);
  const bent = new Float64Array(m * m);
  const small = new Float64Array(m * m);
  const part = new Float64Array(m);

  /** slope = that of half the squared distance to the wish, over the free joints. */
  const wish = (q: Float64Array, preferRad: Float64Array, pitchRad: Float64Array): void => {
    const pitch = pitchRad[0] as number;
    const away = Number.isNaN(pitch) ? 0 : (tip.pitch.rad[0] as number) - pitch;
    pitchWeight[0] = Number.isNaN(pitch) ? 0 : Math.min(PITCH_WEIGHT, PITCH_PULL_MAX / Math.abs(away));
    const pull = away === 0 ? 0 : (pitchWeight[0] as number) * away;
    pitchPull[0] = pull;
    for (let c = 0; c < m; c++) {
      const j = joints[c] as number;
      const prefer = preferRad[j] as number;
      const off = Number.isNaN(prefer) ? 0 : (q[j] as number) - prefer;
      slope[c] = free[c] === 1 ? off + pull * (tip.pitch.slope[c] as number) : 0;
    }
  };

  /** Factors J J' + damping over the free joints; the damping keeps it positive definite. */
  const prepare = (): void => {
    for (let r = 0; r < 3; r++) {
      for (let s = 0; s <= r; s++) {
        let sum = 0;
        for (let c = 0; c < m; c++) {
          if (free[c] === 1) sum += (jacobian[3 * c + r] as number) * (jacobian[3 * c + s] as number);
        }
        gram[3 * r + s] = r === s ? sum + DAMPING : sum;
      }
    }
    factor(gram, 3, 3);
  };

  /** out = (J J' + damping)^-1 J slope. */
  const holdInto = (out: Float64Array): void => {
    for (let r = 0; r < 3; r++) {
      let sum = 0;
      for (let c = 0; c < m; c++) sum += (jacobian[3 * c + r] as number) * (slope[c] as number);
      out[r] = sum;
    }
    solve(gram, 3, 3, out);
  };

  /** slope -= J' (J J' + damping)^-1 J slope, over the free joints. */
  const project = (): void => {
    for (let pass = 0; pass < PASSES; pass++) {
      holdInto(scratch);
      for (let c = 0; c < m; c++) {
        if (free[c] === 0) continue;
        for (let r = 0; r < 3; r++)
          slope[c] = (slope[c] as number) - (jacobian[3 * c + r] as number) * (scratch[r] as number);
      }
    }
  };

  /**
   * Newton's step down the projected slope, with room for a bend. WISH times its second derivative is
   * J'J + WISH (1 + pitch) - (error + WISH hold) . d2p/dq2. False where that is not positive definite.
   */
  const newton = (roomy: boolean): boolean => {
    for (let r = 0; r < 3; r++) along[r] = (error[r] as number) + WISH * (hold[r] as number);
    tip.bend(along, bent, m);
    const pull = pitchPull[0] as number;
    if (pull !== 0) tip.pitch.addBend(WISH * pull, bent, m);
    let bend = WISH * Math.abs(pull);
    for (let r = 0; r < 3; r++) bend += Math.abs(error[r] as number) + WISH * Math.abs(hold[r] as number);
    const room = WISH + (roomy ? BEND_MOST : BEND) * bend;
    let rows = 0;
    for (let c = 0; c < m; c++) if (free[c] === 1) column[rows++] = c;
    for (let r = 0; r < rows; r++) {
      const c = column[r] as number;
      const weight = WISH * (pitchWeight[0] as number) * (tip.pitch.slope[c] as number);
      for (let s = 0; s <= r; s++) {
        const b = column[s] as number;
        small[r * m + s] = (bent[c * m + b] as number) + weight * (tip.pitch.slope[b] as number);
      }
      small[r * m + r] = (small[r * m + r] as number) + room;
      part[r] = -WISH * (slope[c] as number);
    }
    if (!factor(small, m, rows)) return false;
    solve(small, m, rows, part);
    for (let r = 0; r < rows; r++) slope[column[r] as number] = part[r] as number;
    return true;
  };

  return {
    settle(anglesRad, preferRad, pitchRad, minRad, maxRad, step) {
      free.fill(1);
      for (let frozen = true; frozen; ) {
        frozen = false;
        wish(anglesRad, preferRad, pitchRad);
        prepare();
        holdInto(hold);
        project();
        if (newton(false) || newton(true)) project();
        else slope.fill(0);
        for (let c = 0; c < m; c++) {
          const j = joints[c] as number;
          const by = slope[c] as number;
          const at = anglesRad[j] as number;
          const outward = by < 0 ? at - (minRad[j] as number) : (maxRad[j] as number) - at;
          if (by === 0 || outward > AT_END_RAD) continue;
          free[c] = 0;
          frozen = true;
        }
      }
      step.set(slope);
    },
  };
}
