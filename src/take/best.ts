import { compare } from './compare.ts';
import type { Work } from './derive.ts';
import { isTakeFault, takeFault } from './fault.ts';
import type { Take } from './reader.ts';
import { type FollowerSummary, summarize, type TakeSummary } from './summary.ts';

/** How one of several demonstrations of the same motion did; keys are the ones `--json` prints. */
export interface Demonstration {
  readonly take: string;
  /** Means over the followers; null where none moved. Nearer to zero is smoother. */
  readonly spectral_arc_length: number | null;
  readonly log_dimensionless_jerk: number | null;
  /** Seconds in which joints were clipped or held back, summed over joints. */
  readonly held_back_s: number;
  readonly dropouts: number;
  /** Root mean square of how far it is from each other take, laid over each other in time, on the mean over joints. */
  readonly from_others_deg: number;
  /** Places it took in each of these five, summed: less is better. */
  readonly places: number;
}

/**
 * Orders demonstrations of one motion, the best first: the one that is smooth, typical of them all, and least limited. Each
 * measure gives places, and places are summed (J.-C. de Borda's count, 1781), so that no measure needs a weight.
 */
export function* best(takes: readonly Take[]): Work<readonly Demonstration[]> {
  const pairs = takes.flatMap((a, i) => takes.slice(i + 1).map((b) => [a, b] as const));
  if (pairs.length === 0) return takeFault('TAKE_UNFIT', takes[0]?.name ?? '', 'there is no other take to choose from');
  const steps = takes.length + pairs.length;
  const measured: Omit<Demonstration, 'places'>[] = [];
  for (const [i, take] of takes.entries()) {
    const summary = yield* part(summarize(take), i, steps);
    measured.push({ ...measuresOf(summary), from_others_deg: 0 });
  }
  const apart = new Map(takes.map((take) => [take, [] as number[]]));
  for (const [k, [a, b]] of pairs.entries()) {
    const compared = yield* part(compare(a, b), takes.length + k, steps);
    if (isTakeFault(compared)) return compared;
    const deg = mean(compared.joints.map(({ rms_deg }) => rms_deg)) ?? 0;
    apart.get(a)?.push(deg);
    apart.get(b)?.push(deg);
  }
  const all = measured.map((one, i) => ({ ...one, from_others_deg: mean(apart.get(takes[i] as Take) ?? []) ?? 0 }));
  return all
    .map((one) => ({ ...one, places: placesOf(one, all) }))
    .toSorted((a, b) => a.places - b.places || smoothness(a) - smoothness(b));
}

/** The share that a part of the work has of the whole. */
function* part<T>(work: Generator<number, T>, index: number, count: number): Generator<number, T> {
  let step = work.next();
  for (; step.done !== true; step = work.next()) yield (index + step.value) / count;
  return step.value;
}

function measuresOf({ take, leader, followers }: TakeSummary): Omit<Demonstration, 'places' | 'from_others_deg'> {
  const meanOf = (of: (arm: FollowerSummary) => number | null): number | null =>
    mean(followers.map(of).filter((value) => value !== null));
  const held = followers.flatMap((arm) => arm.joints.flatMap((joint) => Object.entries(joint.limited_s)));
  return {
    take,
    spectral_arc_length: meanOf((arm) => arm.spectral_arc_length),
    log_dimensionless_jerk: meanOf((arm) => arm.log_dimensionless_jerk),
    held_back_s: held.reduce((sum, [by, seconds]) => (by === 'deadband' ? sum : sum + seconds), 0),
    dropouts: leader.dropouts.length,
  };
}

type Measured = Omit<Demonstration, 'places'>;

/** Measures of which less is better. */
const MEASURES: readonly ((one: Measured) => number)[] = [
  smoothness,
  (one) => -(one.log_dimensionless_jerk ?? Number.NEGATIVE_INFINITY),
  (one) => one.held_back_s,
  (one) => one.dropouts,
  (one) => one.from_others_deg,
];

function smoothness(one: Measured): number {
  return -(one.spectral_arc_length ?? Number.NEGATIVE_INFINITY);
}

/** In each measure its place is one more than the number of those who are better. */
function placesOf(one: Measured, all: readonly Measured[]): number {
  return MEASURES.reduce((sum, of) => sum + 1 + all.filter((other) => of(other) < of(one)).length, 0);
}

function mean(values: readonly number[]): number | null {
  return values.length === 0 ? null : values.reduce((sum, value) => sum + value, 0) / values.length;
}
