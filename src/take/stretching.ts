import { type Chain, chain as makeChain } from '../arm/chain.ts';
import { type Loads, loads } from '../arm/load.ts';
import { US_PER_S } from '../clock/clock.ts';
import type { Plan } from '../drive/plan.ts';
import type { FollowerSpec } from '../follower/spec.ts';
import type { Cast } from './cast.ts';
import type { Stretch } from './derive.ts';
import { butterworth, zeroPhase } from './low-pass.ts';
import type { Take } from './reader.ts';
import { resampled } from './resample.ts';
import { askedOf } from './asked.ts';

/** What a stretch of a take asks of a follower beyond its limits. */
export interface Demand {
  readonly follower: string;
  /** The joint, or `link ends` for the cap on them. */
  readonly of: string;
  /** `load`: what it would have to hold standing still is too much already, and no slowness cures that. */
  readonly kind: 'speed' | 'acceleration' | 'end speed' | 'load';
  /** How much longer the take has to be for it, over 1; for a load, how many times too heavy it is. */
  readonly factor: number;
}

/** The factor by which time has to be stretched: 1 where every limit is kept. */
export function stretchFor(demands: readonly Demand[]): number {
  return demands.reduce((most, { kind, factor }) => (kind === 'load' ? most : Math.max(most, factor)), 1);
}

/** Rate at which motions are judged, and the cutoff that keeps a converter's step from looking like one: 1e5 deg/s^2 in 1 ms. */
const RATE_HZ = 100;
const CUTOFF_HZ = 5;
/** Judged in stretches, so that memory does not grow with the take; their ends overlap by what the filter remembers. */
const WINDOW_US = 120 * US_PER_S;
const OVERLAP_US = 2 * US_PER_S;
/** Samples between two looks at what an arm would have to hold. */
const LOAD_EVERY = 10;

/**
 * The least factor by which time has to be stretched so that every follower keeps its limits, and what asks for it. Played
 * a factor slower a path has speeds by 1/factor and accelerations by 1/factor^2 (J. M. Hollerbach, "Dynamic scaling of
 * manipulator trajectories", ASME J. Dyn. Sys. 106 (1984) 102-106).
 */
export function* leastStretch(
  take: Take,
  plan: Plan,
  cast: Cast,
  by: 'leader' | 'commands',
  { fromUs, toUs }: Stretch,
): Generator<number, readonly Demand[]> {
  const watches = plan.followers.map((spec, f) => demandWatch(spec, by === 'leader' || cast.followers[f] !== null));
  const anglesOf = askedOf(plan, cast, by);
  for (let startUs = fromUs; startUs < toUs; startUs += WINDOW_US) {
    const first = Math.max(fromUs, startUs - OVERLAP_US);
    const last = Math.min(toUs, startUs + WINDOW_US + OVERLAP_US);
    const tracks = plan.followers.map((spec) => spec.joints.map((): number[] => []));
    for (const row of resampled(take, RATE_HZ, first, last))
      tracks.forEach((joints, f) => {
        const angles = anglesOf(row, f);
        joints.forEach((track, j) => track.push(angles?.[j] ?? Number.NaN));
      });
    tracks.forEach((joints, f) => watches[f]?.judge(joints.map(filtered)));
    yield (startUs - fromUs) / (toUs - fromUs);
  }
  return watches.flatMap((watch) => watch.demands()).toSorted((a, b) => b.factor - a.factor);
}

/** Before the first reading nothing is asked: the first known angle stands for it. */
function filtered(track: readonly number[]): Float64Array {
  const values = Float64Array.from(track);
  const known = values.findIndex((value) => !Number.isNaN(value));
  if (known < 0) return new Float64Array(0);
  values.fill(values[known] as number, 0, known);
  zeroPhase(values, butterworth(CUTOFF_HZ, RATE_HZ), RATE_HZ);
  return values;
}

interface DemandWatch {
  judge(tracks: readonly Float64Array[]): void;
  demands(): readonly Demand[];
}

function demandWatch(spec: FollowerSpec, plays: boolean): DemandWatch {
  const speed = new Float64Array(spec.joints.length);
  const accel = new Float64Array(spec.joints.length);
  const cap = spec.whole?.endSpeedMS ?? null;
  const chain = spec.whole === undefined || cap === null ? null : makeChain(spec.whole.arm);
  const load = spec.whole === undefined ? null : loads(spec.whole.arm, spec.joints.length);
  const shares = new Float64Array(spec.joints.length);
  let endSpeed = 0;
  return {
    judge(tracks) {
      if (!plays) return;
      tracks.forEach((track, j) => {
        for (let k = 1; k < track.length; k++) {
          const v = ((track[k] as number) - (track[k - 1] as number)) * RATE_HZ;
          if (Math.abs(v) > (speed[j] as number)) speed[j] = Math.abs(v);
          if (k + 1 >= track.length) continue;
          const a =
            ((track[k + 1] as number) - 2 * (track[k] as number) + (track[k - 1] as number)) * RATE_HZ * RATE_HZ;
          if (Math.abs(a) > (accel[j] as number)) accel[j] = Math.abs(a);
        }
      });
      if (load !== null) heaviest(load, tracks, shares);
      if (chain !== null) endSpeed = Math.max(endSpeed, fastestEnd(chain, tracks));
    },
    demands() {
      const found: Demand[] = spec.joints.flatMap(({ name, speedRadS, accelRadS2 }, j): Demand[] => [
        { follower: spec.name, of: name, kind: 'speed', factor: (speed[j] as number) / speedRadS },
        { follower: spec.name, of: name, kind: 'load', factor: shares[j] as number },
        { follower: spec.name, of: name, kind: 'acceleration', factor: Math.sqrt((accel[j] as number) / accelRadS2) },
      ]);
      if (cap !== null) found.push({ follower: spec.name, of: 'link ends', kind: 'end speed', factor: endSpeed / cap });
      return found.filter(({ factor }) => factor > 1);
    },
  };
}

/** Raises `most` to the share of what each motor may hold that the heaviest pose asks for. */
function heaviest(load: Loads, tracks: readonly Float64Array[], most: Float64Array): void {
  const angles = new Float64Array(tracks.length);
  const held = new Float64Array(tracks.length);
  for (let k = 0; k < (tracks[0]?.length ?? 0); k += LOAD_EVERY) {
    tracks.forEach((track, j) => {
      angles[j] = track[k] as number;
    });
    load.shares(angles, true, held);
    for (let j = 0; j < held.length; j++) if ((held[j] as number) > (most[j] as number)) most[j] = held[j] as number;
  }
}

/** m/s, by the way each link end makes from one sample to the next. */
function fastestEnd(chain: Chain, tracks: readonly Float64Array[]): number {
  const angles = new Float64Array(tracks.length);
  const before = new Float64Array(chain.at.length);
  let farthest = 0;
  for (let k = 0; k < (tracks[0]?.length ?? 0); k++) {
    tracks.forEach((track, j) => {
      angles[j] = track[k] as number;
    });
    chain.pose(angles);
    for (let at = 3; k > 0 && at < before.length; at += 3) {
      const way = Math.hypot(
        (chain.at[at] as number) - (before[at] as number),
        (chain.at[at + 1] as number) - (before[at + 1] as number),
        (chain.at[at + 2] as number) - (before[at + 2] as number),
      );
      farthest = Math.max(farthest, way);
    }
    before.set(chain.at);
  }
  return farthest * RATE_HZ;
}
