/** Where a value is greatest over a box of joint ranges. */
export interface Worst {
  readonly value: number;
  /** One angle a joint of the profile, radians. */
  readonly poseRad: Float64Array;
}

export interface Ranges {
  readonly minRad: ArrayLike<number>;
  readonly maxRad: ArrayLike<number>;
  /** Joints to vary, by index; the others stay at the middle of their range. */
  readonly joints: readonly number[];
}

/** Poses looked at first: a grid as fine as this allows, its ends included. */
const GRID_POSES = 4096;
const GRID_LEVELS_MAX = 9;
/** A whole root may come out a little below. */
const ROUNDING = 1e-9;
/** The best of them are climbed from. */
const STARTS = 6;
/** A climb ends when its step is below this, radians. */
const FINEST_RAD = 1e-5;
/** Rounds of one climb at most. */
const ROUNDS = 200;

/**
 * Bounded and deterministic: a grid over the ranges, then from its best poses one joint after another, by steps that are
 * halved where nothing rises. It finds the top of what static loads and tipping are, sums of sines of few angles; of a
 * function with many narrow peaks it might miss the highest.
 * @param score NaN counts as lowest
 */
export function worst({ minRad, maxRad, joints }: Ranges, score: (anglesRad: Float64Array) => number): Worst {
  const middle = Float64Array.from(minRad, (low, j) => 0.5 * (low + (maxRad[j] as number)));
  const valueOf = (pose: Float64Array): number => {
    const value = score(pose);
    return Number.isNaN(value) ? Number.NEGATIVE_INFINITY : value;
  };
  const root = GRID_POSES ** (1 / Math.max(1, joints.length));
  const levels = Math.min(GRID_LEVELS_MAX, Math.max(2, Math.floor(root + ROUNDING)));
  const starts = gridBest(middle, { minRad, maxRad, joints }, levels, valueOf);
  let best = starts[0] as Worst;
  for (const start of starts) {
    const top = climb(start, { minRad, maxRad, joints }, levels, valueOf);
    if (top.value > best.value) best = top;
  }
  return best;
}

function gridBest(
  middle: Float64Array,
  { minRad, maxRad, joints }: Ranges,
  levels: number,
  valueOf: (pose: Float64Array) => number,
): Worst[] {
  const found: Worst[] = [{ value: valueOf(middle), poseRad: middle }];
  const pose = Float64Array.from(middle);
  for (let k = 0; k < levels ** joints.length; k++) {
    let digits = k;
    for (const j of joints) {
      const low = minRad[j] as number;
      pose[j] = low + ((maxRad[j] as number) - low) * ((digits % levels) / (levels - 1));
      digits = Math.floor(digits / levels);
    }
    const value = valueOf(pose);
    if (found.length >= STARTS && value <= (found.at(-1) as Worst).value) continue;
    found.push({ value, poseRad: Float64Array.from(pose) });
    found.sort((a, b) => b.value - a.value);
    found.length = Math.min(found.length, STARTS);
  }
  return found;
}

function climb(
  start: Worst,
  { minRad, maxRad, joints }: Ranges,
  levels: number,
  valueOf: (pose: Float64Array) => number,
): Worst {
  const pose = Float64Array.from(start.poseRad);
  let top = start.value;
  // Half way to the grid's next pose: those beyond are starts of their own.
  const widest = Math.max(...joints.map((j) => (maxRad[j] as number) - (minRad[j] as number)), 0);
  let step = (0.5 * widest) / (levels - 1);
  for (let round = 0; round < ROUNDS && step > FINEST_RAD; round++) {
    let rose = false;
    for (const j of joints) {
      const from = pose[j] as number;
      for (const by of [step, -step]) {
        pose[j] = Math.min(Math.max(from + by, minRad[j] as number), maxRad[j] as number);
        const value = valueOf(pose);
        if (value > top) {
          top = value;
          rose = true;
          break;
        }
        pose[j] = from;
      }
    }
    if (!rose) step /= 2;
  }
  return { value: top, poseRad: pose };
}
