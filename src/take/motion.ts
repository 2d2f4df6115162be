import { US_PER_S } from '../clock/clock.ts';
import type { Plan } from '../drive/plan.ts';
import { askedOf } from './asked.ts';
import type { Cast } from './cast.ts';
import type { Stretch } from './derive.ts';
import { blend } from './minimum-jerk.ts';
import type { Take } from './reader.ts';
import { resampled } from './resample.ts';

/** What a stretch of a take asks of a rig's followers, on the take's own time. */
export interface Motion extends Stretch {
  readonly take: Take;
  readonly plan: Plan;
  readonly cast: Cast;
  readonly by: 'leader' | 'commands';
  /** Over and over, its end joined to its start by a blend that lasts this long; null: once. */
  readonly loopBlendS: number | null;
}

/** Samples of a motion in a second. */
export const SAMPLES_HZ = 100;
/** A speed at the seam of a loop is told from this many samples: fewer are only the converter's noise. */
const SLOPE_SAMPLES = 5;

/** Followers of the rig that have a part in it. */
export function playing({ plan, cast, by }: Motion): readonly number[] {
  return plan.followers.flatMap((_, f) => (by === 'leader' || (cast.followers[f] ?? null) !== null ? [f] : []));
}

/** Samples of one round: of the stretch, and of the blend back to its start. */
export function samplesOfRound({ fromUs, toUs, loopBlendS }: Motion): number {
  return Math.floor(((toUs - fromUs) * SAMPLES_HZ) / US_PER_S) + 1 + (loopBlendS === null ? 0 : blendSteps(loopBlendS));
}

/**
 * Angles that are asked of these followers, their joints one after another, at even instants; endless where it loops. Before
 * the first reading nothing is asked: the first known angles stand for it. Each sample is reused.
 */
export function* samples(motion: Motion, followers: readonly number[]): Generator<Float64Array> {
  const first: Float64Array[] = [];
  const last: Float64Array[] = [];
  do {
    first.length = 0;
    for (const sample of once(motion, followers)) {
      if (first.length <= SLOPE_SAMPLES) first.push(sample.slice());
      if (motion.loopBlendS !== null) {
        const kept = last.length > SLOPE_SAMPLES ? (last.shift() as Float64Array) : sample.slice();
        kept.set(sample);
        last.push(kept);
      }
      yield sample;
    }
    motion.take.fetch(motion.fromUs, motion.fromUs);
    if (motion.loopBlendS !== null && last.length > 0) yield* seam(last, first, motion.loopBlendS);
  } while (motion.loopBlendS !== null && last.length > 0);
}

function* once(motion: Motion, followers: readonly number[]): Generator<Float64Array> {
  const { take, plan, cast, by, fromUs, toUs } = motion;
  const asked = askedOf(plan, cast, by);
  const sample = new Float64Array(followers.reduce((sum, f) => sum + (plan.followers[f]?.joints.length ?? 0), 0));
  let unknown = 0;
  for (const row of resampled(take, SAMPLES_HZ, fromUs, toUs)) {
    let at = 0;
    for (const f of followers) {
      const angles = asked(row, f) ?? [];
      for (const angle of angles) sample[at++] = angle;
    }
    if (sample.includes(Number.NaN)) {
      unknown++;
      continue;
    }
    for (; unknown > 0; unknown--) yield sample;
    yield sample;
  }
}

/** A minimum-jerk way from the last samples to the first ones, neither of them in it. */
function* seam(
  last: readonly Float64Array[],
  first: readonly Float64Array[],
  seconds: number,
): Generator<Float64Array> {
  const [from, to] = [last.at(-1), first[0]] as [Float64Array, Float64Array];
  const slope = (ends: readonly Float64Array[], j: number): number => {
    const [a, b] = [ends[0], ends.at(-1)] as [Float64Array, Float64Array];
    return ends.length < 2 ? 0 : (((b[j] as number) - (a[j] as number)) * SAMPLES_HZ) / (ends.length - 1);
  };
  const steps = blendSteps(seconds) + 1;
  const ways = Array.from(from, (x, j) =>
    blend(x, slope(last, j), to[j] as number, slope(first, j), steps / SAMPLES_HZ),
  );
  const sample = from.slice();
  for (let k = 1; k < steps; k++) {
    ways.forEach((way, j) => {
      sample[j] = way.at(k / SAMPLES_HZ);
    });
    yield sample;
  }
}

function blendSteps(seconds: number): number {
  return Math.max(1, Math.round(seconds * SAMPLES_HZ));
}
