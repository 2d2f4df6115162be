import { US_PER_S } from '../clock/clock.ts';
import type { CompiledRig } from '../rig/compiled.ts';
import { isTakeFault } from '../take/fault.ts';
import type { Motion } from '../take/motion.ts';
import type { Take } from '../take/reader.ts';
import { type Demand, leastStretch, stretchFor } from '../take/stretching.ts';
import { weights } from '../take/weighted.ts';
import type { PlayOptions } from './take-play-options.ts';
import type { Score } from './take-score.ts';
import { refusedStatus, worked } from './take-work.ts';
import type { TakeWorld } from './take-world.ts';

/** Each follower's own time, where it has one. */
export interface Pace {
  readonly motion: Motion;
  readonly factors: readonly number[];
}

/** null: the take is played as it is, at the asked speed. */
export async function paceFor(
  take: Take,
  rig: CompiledRig,
  score: Score,
  options: PlayOptions,
  world: TakeWorld,
): Promise<Pace | { readonly status: number } | null> {
  const { plan } = rig;
  // Commands go to each arm by itself: only in a time that all can keep do they stay in step.
  const keepLimits = options.keepLimits || (plan.unison && score.by === 'commands');
  if (!keepLimits && !options.weight) return null;
  const own = options.weight ? weights(take, plan) : plan.followers.map(() => 1);
  if (isTakeFault(own)) return { status: refusedStatus(own, world.err) };
  const blendS = loopBlendS(options);
  // The blend lasts what was asked for at the asked speed.
  const motion = { ...score, take, plan, loopBlendS: blendS === null ? null : blendS * score.speed };
  const factors = own.map((factor) => factor / score.speed);
  if (!keepLimits) return { motion, factors };
  const judged = await worked(leastStretch(motion, factors), world);
  if ('status' in judged) return judged;
  for (const sentence of sentencesOf(judged.done)) world.err.write(`${sentence}\n`);
  const stretch = stretchFor(judged.done);
  return { motion, factors: factors.map((factor) => factor * stretch) };
}

export function loopBlendS({ loopBlendUs }: PlayOptions): number | null {
  return loopBlendUs === null ? null : loopBlendUs / US_PER_S;
}

function sentencesOf(demands: readonly Demand[]): readonly string[] {
  const loads = demands.filter(({ kind }) => kind === 'load');
  const worst = demands.find(({ kind }) => kind !== 'load');
  return [
    ...loads.map(
      ({ follower, of, factor, atS }) =>
        `${follower}: ${of} would have to hold ${factor.toFixed(2)} times what its motor may at ${atS.toFixed(1)} s, even standing still; no slowness cures that: balance the arm, or change the motion`,
    ),
    worst === undefined
      ? 'every follower keeps its limits as it is'
      : `time is stretched ${stretchFor(demands).toFixed(2)} times: ${describe(worst)} asks for it`,
  ];
}

function describe({ follower, of, kind, atS }: Demand): string {
  return `the ${kind} of ${follower}'s ${of} at ${atS.toFixed(1)} s`;
}
