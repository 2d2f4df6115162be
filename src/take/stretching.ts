import { type Chain, chain as makeChain } from '../arm/chain.ts';
import { loads } from '../arm/load.ts';
import type { FollowerSpec } from '../follower/spec.ts';
import { type Motion, playing, samples, SAMPLES_HZ, samplesOfRound } from './motion.ts';
import { accelAt, peakSpeed, type Piece, pieces, REACH } from './smooth-path.ts';

/** What a motion asks of a follower beyond its limits. */
export interface Demand {
  readonly follower: string;
  /** The joint, or `link ends` for the cap on them. */
  readonly of: string;
  /** `load`: what it would have to hold standing still is too much already, and no slowness cures that. */
  readonly kind: 'speed' | 'acceleration' | 'end speed' | 'load';
  /** How much longer the motion has to be for it, over 1; for a load, how many times too heavy it is. */
  readonly factor: number;
  /** Where in the stretch it asks for most, seconds. */
  readonly atS: number;
}

/** The factor by which time has to be stretched: 1 where every limit is kept. */
export function stretchFor(demands: readonly Demand[]): number {
  return demands.reduce((most, { kind, factor }) => (kind === 'load' ? most : Math.max(most, factor)), 1);
}

/** A joint counts as moving at its limit from 0.999 of it on: motions are stretched to stay just below. */
const LIMIT_SHARE = 0.998;
/**
 * Pieces at either end that are not judged: in a stretch out of the middle of a motion an arm has to come up to it from
 * standing, and to stand at its end. The governor does that within the limits, and a tenth of a second is no reason to play
 * the whole many times slower.
 */
const EDGE = 11;
/** Pieces of the path between two looks at what an arm would have to hold. */
const LOAD_EVERY = 10;
const STEPS_A_LOOK = 500;

/**
 * The least factor by which time has to be stretched so that every follower keeps its limits along the path it is then
 * commanded along, its very ends apart, and what asks for it. Played a factor slower a path has speeds by 1/factor and accelerations by
 * 1/factor^2 (J. M. Hollerbach, "Dynamic scaling of manipulator trajectories", ASME J. Dyn. Sys. 106 (1984) 102-106).
 * @param factors by which each follower of the rig is slower than the take anyhow
 */
export function* leastStretch(motion: Motion, factors: readonly number[]): Generator<number, readonly Demand[]> {
  const { plan } = motion;
  let from = 0;
  const watches = playing(motion).map((f) => {
    const spec = plan.followers[f] as FollowerSpec;
    const watch = demandWatch(spec, from, plan.pace, factors[f] as number);
    from += spec.joints.length;
    return watch;
  });
  const round = samplesOfRound(motion);
  // A loop goes on into its second round: the seam is judged with what lies on either side of it.
  const end = motion.loopBlendS === null ? round + REACH - EDGE : round + 2 * REACH + EDGE;
  let k = 0;
  for (const piece of pieces(samples(motion, playing(motion)))) {
    if (k >= REACH + EDGE)
      for (const watch of watches) watch.look(piece, (k - REACH) / SAMPLES_HZ, k % LOAD_EVERY === 0);
    k++;
    if (k >= end) break;
    if (k % STEPS_A_LOOK === 0) yield k / end;
  }
  return watches.flatMap((watch) => watch.demands()).toSorted((a, b) => b.factor - a.factor);
}

/** The most that was asked of something, and when. */
interface Most {
  value: number;
  atS: number;
}

interface DemandWatch {
  look(piece: Piece, atS: number, weighs: boolean): void;
  demands(): readonly Demand[];
}

/** @param from where in a sample its joints begin */
function demandWatch(spec: FollowerSpec, from: number, pace: number, factor: number): DemandWatch {
  const none = (): Most => ({ value: 0, atS: 0 });
  const speeds = spec.joints.map(none);
  const accels = spec.joints.map(none);
  const shares = spec.joints.map(none);
  const ends = none();
  const cap = spec.whole?.endSpeedMS ?? null;
  const end = spec.whole === undefined || cap === null ? null : endSpeeds(makeChain(spec.whole.arm));
  const load = spec.whole === undefined ? null : loads(spec.whole.arm, spec.joints.length);
  const angles = new Float64Array(spec.joints.length);
  const held = new Float64Array(spec.joints.length);
  return {
    look(piece, atS, weighs) {
      spec.joints.forEach((_, j) => {
        raise(speeds[j] as Most, peakSpeed(piece, from + j), atS);
        raise(accels[j] as Most, Math.abs(accelAt(piece, from + j)), atS);
      });
      if (load === null) return;
      whereItBegins(piece, from, angles);
      if (end !== null) raise(ends, end(angles), atS);
      if (!weighs) return;
      load.shares(angles, true, held);
      held.forEach((share, j) => raise(shares[j] as Most, share, atS));
    },
    demands() {
      const { name: follower } = spec;
      const found = spec.joints.flatMap(({ name: of, speedRadS, accelRadS2 }, j): Demand[] => {
        const [speed, accel, share] = [speeds[j], accels[j], shares[j]] as [Most, Most, Most];
        const tooFast = speed.value / (LIMIT_SHARE * pace * speedRadS * factor);
        const tooHard = Math.sqrt(accel.value / (LIMIT_SHARE * accelRadS2)) / factor;
        return [
          { follower, of, kind: 'speed', factor: tooFast, atS: speed.atS },
          { follower, of, kind: 'acceleration', factor: tooHard, atS: accel.atS },
          { follower, of, kind: 'load', factor: share.value, atS: share.atS },
        ];
      });
      if (cap !== null) {
        const tooFast = ends.value / (LIMIT_SHARE * cap * factor);
        found.push({ follower, of: 'link ends', kind: 'end speed', factor: tooFast, atS: ends.atS });
      }
      return found.filter((demand) => demand.factor > 1);
    },
  };
}

function raise(most: Most, value: number, atS: number): void {
  if (value <= most.value) return;
  most.value = value;
  most.atS = atS;
}

function whereItBegins([a, b, c]: Piece, from: number, out: Float64Array): void {
  for (let j = 0; j < out.length; j++)
    out[j] = ((a[from + j] as number) + 4 * (b[from + j] as number) + (c[from + j] as number)) / 6;
}

/** m/s, by the way each link end makes from one call to the next, a sample's time later. */
function endSpeeds(chain: Chain): (angles: Float64Array) => number {
  const before = new Float64Array(chain.at.length).fill(Number.NaN);
  return (angles) => {
    chain.pose(angles);
    let farthest = 0;
    for (let at = 3; at < before.length; at += 3) {
      const way = Math.hypot(
        (chain.at[at] as number) - (before[at] as number),
        (chain.at[at + 1] as number) - (before[at + 1] as number),
        (chain.at[at + 2] as number) - (before[at + 2] as number),
      );
      // Before the first call nobody was anywhere.
      if (way > farthest) farthest = way;
    }
    before.set(chain.at);
    return farthest * SAMPLES_HZ;
  };
}
