import { chain as makeChain } from './chain.ts';
import { factor, solve as backSolve } from './cholesky.ts';
import { settling } from './settling.ts';
import type { ArmSpec } from './spec.ts';
import { tipMotion } from './tip-motion.ts';

/**
 * Joint angles for a place of the tip, by damped least squares inside the joints' ranges, warm-started from the last
 * answer (C. W. Wampler, IEEE Trans. Systems, Man, Cybernetics 16 (1986) 93-101; Y. Nakamura, H. Hanafusa, J. Dyn. Sys.
 * Meas. Control 108 (1986) 163-171; both from memory).
 *
 * A call minimises |tip - target|^2 / reach^2 + damping^2 |q - a|^2 within the ranges, where `a` is the last answer,
 * moved a little towards the preferred pose as far as the tip is not moved by it. So a target that stands is met
 * exactly after some calls, the nearest reachable point is, if it is out of reach, and near a singular pose a call answers
 * with 1 / damping radians at most for each reach that the target is away: it lags instead of shaking. The full second
 * derivative is used, because at the edge of reach J'J alone overshoots from one side of the stretched pose to the other.
 */
export interface Inverse {
  /** What is left between the tip and the target after the last call, metres. */
  readonly leftM: Float64Array;
  /** Pitch that the last link should keep, radians against the horizontal, where a joint is free for it; NaN: none. */
  readonly pitchRad: Float64Array;
  /**
   * A target that is not known (NaN) changes nothing.
   * @param targetM 3 values in the base's level frame, metres
   * @param preferRad pose to settle towards, in joint order; joints that do not reach are put there. NaN: no wish
   * @param anglesRad the last answer, in joint order; the new one is written here
   */
  solve(targetM: Float64Array, preferRad: Float64Array, anglesRad: Float64Array): void;
}

export interface InverseOptions {
  /** Ranges in joint order, radians. */
  readonly minRad: Float64Array;
  readonly maxRad: Float64Array;
  /** Joints, by index, that reach for the target; the others stay at the preferred pose. */
  readonly moves: readonly number[];
  /** Most that a joint turns in one call, radians. */
  readonly turnMaxRad?: number;
}

/** As a share of the reach a radian: below it a direction counts as singular. A call closes s^2 / (s^2 + damping^2). */
const DAMPING = 0.05;
const DAMPING_SQUARED = DAMPING * DAMPING;
/** A fifth of a radian a call is 570 degrees a second at 50 calls: the governor limits the arm far below. */
const TURN_MAX_RAD = 0.2;
/** Settling takes at most this share of it: the rest is for the target. */
const SETTLING_SHARE = 0.5;
/** Steps tried in one call, refused ones included. */
const STEPS = 16;
/** Slopes below this are flat; of a squared share of the reach per radian. */
const FLAT = 1e-10;
/** A joint that is held by less than this is not held, radians. */
const HELD_RAD = 1e-10;
/** Farther from the target than this share of the reach, a flat place may be a saddle: a straight arm, pulled along itself. */
const SADDLE = 1e-5;
/** A joint that moves the tip towards the target by less than this share of its way there, per radian, does not pull. */
const SADDLE_PULL = 1e-3;
/** A second derivative above minus this is no saddle's. */
const SADDLE_CURVE = 1e-8;
/** Turned towards the middle of the range to leave a saddle, radians. */
const KICK_RAD = 0.02;
/** A cost that differs by less is the same. */
const ROUNDED = 1 + 1e-12;
const NOWHERE = new Float64Array(3);
/** Added to the second derivative after a refused step, and multiplied after more of them. */
const STIFFEN_FIRST = 1e-2;
const STIFFEN = 8;

export function inverse(spec: ArmSpec, options: InverseOptions): Inverse {
  const tip = tipMotion(makeChain(spec), options.moves);
  const { joints, error, jacobian, reachM } = tip;
  const m = joints.length;
  const { minRad, maxRad, turnMaxRad = TURN_MAX_RAD } = options;
  const reaches = Uint8Array.from(minRad, (_, j) => (joints.includes(j) ? 1 : 0));
  const spare = settling(tip);
  const leftM = new Float64Array(1);
  const pitchRad = Float64Array.of(Number.NaN);
  /** Columns of the joints that move: where they may be in this call, where they are damped towards. */
  const low = new Float64Array(m);
  const high = new Float64Array(m);
  const anchor = new Float64Array(m);
  const slope = new Float64Array(m);
  const step = new Float64Array(m);
  const kept = new Float64Array(m);
  const rest = new Float64Array(m);
  const bent = new Float64Array(m * m);
  const small = new Float64Array(m * m);
  const free = new Uint8Array(m);
  const column = new Uint8Array(m);
  /** cost[0]: here; cost[1]: after the step. */
  const cost = new Float64Array(2);
  const left = new Float64Array(1);
  /** Added to the second derivative's diagonal. */
  const stiffness = new Float64Array(1);

  const begin = (preferRad: Float64Array, q: Float64Array): void => {
    for (let j = 0; j < q.length; j++) {
      const stays = reaches[j] === 1 || Number.isNaN(preferRad[j]);
      const value = stays ? (q[j] as number) : (preferRad[j] as number);
      q[j] = Math.min(Math.max(value, minRad[j] as number), maxRad[j] as number);
    }
    for (let c = 0; c < m; c++) {
      const j = joints[c] as number;
      low[c] = Math.max(minRad[j] as number, (q[j] as number) - turnMaxRad);
      high[c] = Math.min(maxRad[j] as number, (q[j] as number) + turnMaxRad);
    }
  };

  /** left[0] = squared distance to the target, in shares of the reach. */
  const measure = (): void => {
    let sum = 0;
    for (let k = 0; k < 3; k++) sum += (error[k] as number) * (error[k] as number);
    left[0] = sum;
  };

  const weigh = (q: Float64Array, targetM: Float64Array, i: number): void => {
    tip.look(q, targetM);
    measure();
    let sum = 0;
    for (let c = 0; c < m; c++) {
      const off = DAMPING * ((q[joints[c] as number] as number) - (anchor[c] as number));
      sum += off * off;
    }
    cost[i] = sum + (left[0] as number);
  };

  /** Fills `slope`, and `free` with the joints that are not held by an end. True where it is flat. */
  const flat = (q: Float64Array): boolean => {
    let steepest = 0;
    for (let c = 0; c < m; c++) {
      const at = q[joints[c] as number] as number;
      let sum = DAMPING_SQUARED * (at - (anchor[c] as number));
      for (let k = 0; k < 3; k++) sum -= (jacobian[3 * c + k] as number) * (error[k] as number);
      slope[c] = sum;
      const held = (at <= (low[c] as number) && sum > 0) || (at >= (high[c] as number) && sum < 0);
      free[c] = held ? 0 : 1;
      if (!held) steepest = Math.max(steepest, Math.abs(sum));
    }
    return steepest < FLAT;
  };

  /** Takes the free joints' rows of `bent`, stiffened, into `small`, and factors them. */
  const factorFree = (): boolean => {
    const stiffen = stiffness[0] as number;
    let rows = 0;
    for (let c = 0; c < m; c++) if (free[c] === 1) column[rows++] = c;
    for (let r = 0; r < rows; r++) {
      const c = column[r] as number;
      for (let s = 0; s <= r; s++) small[r * m + s] = bent[c * m + (column[s] as number)] as number;
      small[r * m + r] = (small[r * m + r] as number) + stiffen;
    }
    return factor(small, m, rows);
  };

  /** step = the way to the lowest place of the quadratic model, inside the ranges. */
  const lowest = (q: Float64Array): void => {
    step.fill(0);
    for (let again = true; again; ) {
      again = false;
      tip.bend(error, bent, m);
      if (!factorFree()) {
        tip.bend(NOWHERE, bent, m);
        factorFree();
      }
      let rows = 0;
      for (let c = 0; c < m; c++) {
        if (free[c] === 0) continue;
        let sum = -(slope[c] as number);
        for (let b = 0; b < m; b++) {
          if (free[b] === 0) sum -= (bent[Math.max(b, c) * m + Math.min(b, c)] as number) * (step[b] as number);
        }
        rest[rows++] = sum;
      }
      backSolve(small, m, rows, rest);
      for (let r = 0; r < rows; r++) {
        const c = column[r] as number;
        const at = q[joints[c] as number] as number;
        step[c] = Math.min(Math.max(at + (rest[r] as number), low[c] as number), high[c] as number) - at;
        // A joint that meets its end stays there, and the others make up for it.
        if (Math.abs((step[c] as number) - (rest[r] as number)) > HELD_RAD) {
          free[c] = 0;
          again = true;
        }
      }
    }
  };

  const take = (q: Float64Array): void => {
    for (let c = 0; c < m; c++) {
      const j = joints[c] as number;
      kept[c] = q[j] as number;
      const to = (q[j] as number) + (step[c] as number);
      q[j] = Math.min(Math.max(to, low[c] as number), high[c] as number);
    }
  };

  const takeBack = (q: Float64Array): void => {
    for (let c = 0; c < m; c++) q[joints[c] as number] = kept[c] as number;
  };

  /** Far from the target on flat ground that falls off to both sides: no joint that is free pulls the tip to it. */
  const onSaddle = (): boolean => {
    measure();
    if ((left[0] as number) < SADDLE * SADDLE) return false;
    const mostPull = SADDLE_PULL * Math.sqrt(left[0] as number);
    for (let c = 0; c < m; c++) {
      let pull = 0;
      for (let k = 0; k < 3; k++) pull += (jacobian[3 * c + k] as number) * (error[k] as number);
      if (free[c] === 1 && Math.abs(pull) > mostPull) return false;
    }
    tip.bend(error, bent, m);
    stiffness[0] = SADDLE_CURVE;
    return !factorFree();
  };

  const kick = (q: Float64Array): void => {
    for (let c = 0; c < m; c++) {
      const j = joints[c] as number;
      const up = (q[j] as number) <= 0.5 * ((minRad[j] as number) + (maxRad[j] as number));
      step[c] = free[c] === 0 ? 0 : up ? KICK_RAD : -KICK_RAD;
    }
    take(q);
  };

  /** Steps down to the nearest place to the target, damped towards the anchor. */
  const approach = (targetM: Float64Array, q: Float64Array): void => {
    weigh(q, targetM, 0);
    let refused = 0;
    let kicked = false;
    for (let tried = 0; tried < STEPS; tried++) {
      tip.slopes();
      if (flat(q)) {
        if (kicked || !onSaddle()) return;
        kicked = true;
        kick(q);
        weigh(q, targetM, 0);
        continue;
      }
      stiffness[0] = refused === 0 ? DAMPING_SQUARED : DAMPING_SQUARED + STIFFEN_FIRST * STIFFEN ** (refused - 1);
      lowest(q);
      take(q);
      weigh(q, targetM, 1);
      if ((cost[1] as number) < (cost[0] as number)) {
        cost[0] = cost[1] as number;
        refused = Math.max(0, refused - 1);
        continue;
      }
      takeBack(q);
      tip.look(q, targetM);
      if ((cost[1] as number) <= (cost[0] as number) * ROUNDED) return;
      refused++;
    }
    tip.slopes();
  };

  /** Moves the anchor, and the joints with it, towards the preferred pose. */
  const settle = (preferRad: Float64Array, q: Float64Array): void => {
    if (!Number.isNaN(pitchRad[0])) tip.pitch.look();
    spare.settle(q, preferRad, pitchRad, minRad, maxRad, step);
    // All joints alike, or the tip would move: as far as the first of them may.
    let share = 1;
    for (let c = 0; c < m; c++) {
      const by = step[c] as number;
      const at = q[joints[c] as number] as number;
      const room = by < 0 ? at - (low[c] as number) : (high[c] as number) - at;
      const most = Math.min(room, SETTLING_SHARE * turnMaxRad);
      if (Math.abs(by) * share > most) share = most / Math.abs(by);
    }
    for (let c = 0; c < m; c++) {
      const j = joints[c] as number;
      const to = (q[j] as number) + share * (step[c] as number);
      q[j] = Math.min(Math.max(to, low[c] as number), high[c] as number);
      anchor[c] = q[j] as number;
    }
  };

  return {
    leftM,
    pitchRad,
    solve(targetM, preferRad, q) {
      if (Number.isNaN((targetM[0] as number) + (targetM[1] as number) + (targetM[2] as number))) return;
      begin(preferRad, q);
      for (let c = 0; c < m; c++) anchor[c] = q[joints[c] as number] as number;
      approach(targetM, q);
      settle(preferRad, q);
      approach(targetM, q);
      measure();
      leftM[0] = reachM * Math.sqrt(left[0] as number);
    },
  };
}
