import { resolve } from 'node:path';
import { withFollowers } from '../bridge/selection.ts';
import { wakeMemory, wakeMemoryFile } from '../bridge/wake-memory.ts';
import { US_PER_S } from '../clock/clock.ts';
import type { CompiledRig } from '../rig/compiled.ts';
import { type Cast, castFollowers, castLeader, renames } from '../take/cast.ts';
import { stretchOf, type Stretch } from '../take/derive.ts';
import { isTakeFault, type TakeFault, takeFault } from '../take/fault.ts';
import { takesFolder } from '../take/folder.ts';
import type { Made } from '../take/header.ts';
import { type Phase, player, type Player } from '../take/player.ts';
import type { Take } from '../take/reader.ts';
import type { Motion } from '../take/motion.ts';
import { pacedReel } from '../take/paced-reel.ts';
import { readingAhead } from '../take/read-ahead.ts';
import { reel } from '../take/reel.ts';
import type { Row } from '../take/row.ts';
import { type Demand, leastStretch, stretchFor } from '../take/stretching.ts';
import { weights } from '../take/weighted.ts';
import type { Companion, Company } from './companion.ts';
import { driving } from './driving.ts';
import { rigOrMistakes } from './load.ts';
import { portOf } from './port-of.ts';
import { takeOrStatus } from './take-files.ts';
import { recording, type Recording } from './take-recording.ts';
import { refusedStatus, worked } from './take-work.ts';
import type { TakeWorld } from './take-world.ts';
import type { World } from './world.ts';

export interface PlayOptions {
  readonly rig: string;
  readonly takes: string | undefined;
  readonly by: 'leader' | 'commands';
  readonly speed: number;
  readonly from: string | undefined;
  readonly to: string | undefined;
  /** Length of the blend from end to start, microseconds; null: once. */
  readonly loopBlendUs: number | null;
  readonly countInUs: number;
  readonly map: readonly string[];
  readonly keepLimits: boolean;
  readonly weight: boolean;
  readonly unattended: boolean;
  readonly join: boolean;
  readonly stay: boolean;
  readonly json: boolean;
  /** Joints that stay in the hand, and the name of the take that is recorded; null: it is only played. */
  readonly layer: { readonly as: string; readonly joints: readonly string[] } | null;
}

const NEEDS_JOIN = 'there is no terminal to ask for the go; say --join to let the arms start without asking';

/** Plays a take on a rig, alone or with some joints in the hand; resolves with the exit status. */
export async function playTake(name: string, options: PlayOptions, world: World, at: TakeWorld): Promise<number> {
  const { err, terminal, env, clock } = world;
  const loaded = rigOrMistakes(options.rig, err.write);
  if (loaded === null) return 2;
  if ((terminal === null || options.json) && !options.join) {
    err.write(`error: ${NEEDS_JOIN}\n`);
    return 2;
  }
  const folder = takesFolder(options.takes, env);
  const take = takeOrStatus(at, folder, name);
  if (typeof take === 'number') return take;
  try {
    const rig = castRig(take, loaded.rig, options);
    const score = isTakeFault(rig) ? rig : scoreFor(take, rig, options);
    if (isTakeFault(rig)) return refusedStatus(rig, at.err);
    if (isTakeFault(score)) return refusedStatus(score, at.err);
    const paced = await paceFor(take, rig, score, options, at);
    if (paced !== null && 'status' in paced) return paced.status;
    const ahead = readingAhead(take);
    const rows =
      paced === null
        ? reel(ahead, { ...score, loopBlendS: loopBlendS(options) })
        : pacedReel({ ...paced.motion, take: ahead }, paced.factors);
    const layered =
      options.layer === null
        ? null
        : recording(
            { folder, name: options.layer.as, countInUs: null, marks: [], rig, profiles: loaded.profiles },
            err.write,
          );
    if (options.layer !== null && layered === null) return 2;
    const companion = playing(take, rig, rows, score, options, layered);
    return await driving(
      {
        rig,
        openPort: (board) => portOf(rig, board, clock),
        memory: (onFault) => wakeMemory(wakeMemoryFile(resolve(options.rig), env), onFault),
        unasked: options.join,
        dry: false,
        real: true,
        forUs: null,
        json: options.json,
        logLevel: 'warn',
        logFile: null,
        companion,
      },
      world,
    );
  } finally {
    take.close();
  }
}

/** What is played, by whom. */
interface Score extends Stretch {
  readonly cast: Cast;
  readonly by: 'leader' | 'commands';
  readonly speed: number;
  /** 1 for each leader joint that the take leads. */
  readonly posed: Uint8Array;
}

/** The rig with those who have a part, and without an enable button where nobody is there to hold it. */
function castRig(take: Take, rig: CompiledRig, { map, by, unattended }: PlayOptions): CompiledRig | TakeFault {
  const names = renames(take, map);
  if (isTakeFault(names)) return names;
  const parts = by === 'leader' ? rig.plan.followers.map(() => true) : castFollowers(take, rig.plan, names);
  if (isTakeFault(parts)) return parts;
  const keep = rig.plan.followers.filter((_, f) => parts[f] !== null).map((spec) => spec.name);
  const kept = withFollowers(rig, new Set(keep));
  if (!unattended) return kept;
  const { leader } = kept.plan;
  const buttons = leader.buttons.filter(({ does }) => does !== 'enable');
  return { ...kept, plan: { ...kept.plan, leader: { ...leader, buttons } } };
}

function scoreFor(take: Take, rig: CompiledRig, options: PlayOptions): Score | TakeFault {
  const stretch = stretchOf(take, options.from, options.to);
  if (isTakeFault(stretch)) return stretch;
  const names = renames(take, options.map);
  if (isTakeFault(names)) return names;
  const { plan } = rig;
  const leader = options.by === 'leader' ? castLeader(take, plan, names) : [];
  if (isTakeFault(leader)) return leader;
  const followers = options.by === 'leader' ? [] : castFollowers(take, plan, names);
  if (isTakeFault(followers)) return followers;
  const inHand = options.layer?.joints ?? [];
  const strange = inHand.find((joint) => !plan.leader.joints.some(({ name }) => name === joint));
  if (strange !== undefined)
    return takeFault(
      'TAKE_JOINTS',
      take.name,
      `the rig's leader has no joint ${strange}, only ${plan.leader.joints.map(({ name }) => name).join(', ')}`,
    );
  const posed = Uint8Array.from(plan.leader.joints, ({ name }) => (inHand.includes(name) ? 0 : 1));
  return { ...stretch, cast: { leader, followers }, by: options.by, speed: options.speed, posed };
}

/** Each follower's own time, where it has one. */
interface Pace {
  readonly motion: Motion;
  readonly factors: readonly number[];
}

/** null: the take is played as it is, at the asked speed. */
async function paceFor(
  take: Take,
  rig: CompiledRig,
  score: Score,
  options: PlayOptions,
  world: TakeWorld,
): Promise<Pace | { readonly status: number } | null> {
  if (!options.keepLimits && !options.weight) return null;
  const { plan } = rig;
  const own = options.weight ? weights(take, plan) : plan.followers.map(() => 1);
  if (isTakeFault(own)) return { status: refusedStatus(own, world.err) };
  const blendS = loopBlendS(options);
  // The blend lasts what was asked for at the asked speed.
  const motion = { ...score, take, plan, loopBlendS: blendS === null ? null : blendS * score.speed };
  const factors = own.map((factor) => factor / score.speed);
  if (!options.keepLimits) return { motion, factors };
  const judged = await worked(leastStretch(motion, factors), world);
  if ('status' in judged) return judged;
  for (const sentence of sentencesOf(judged.done)) world.err.write(`${sentence}\n`);
  const stretch = stretchFor(judged.done);
  return { motion, factors: factors.map((factor) => factor * stretch) };
}

function loopBlendS({ loopBlendUs }: PlayOptions): number | null {
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

function playing(
  take: Take,
  rig: CompiledRig,
  rows: Iterator<Row>,
  score: Score,
  options: PlayOptions,
  recorded: Recording | null,
): Companion {
  let company: Company | null = null;
  let running: Player | null = null;
  let begun = false;
  const { layer } = options;
  // On a time of its own each follower has commands of its own, whoever led them.
  const own = options.weight || options.keepLimits ? ownCommands(rig) : null;
  const made: Made = {
    by: 'layer',
    parents: [{ take: take.name, rows: take.rows }],
    how: { in_hand: layer?.joints.join(' ') ?? '' },
  };

  const changed = (phase: Phase): void => {
    if (company === null) return;
    const say = (text: string): void => company?.say({ text, weight: 'note' });
    switch (phase) {
      case 'easing':
        return say(`${take.name}: the arms go gently to where it begins`);
      case 'counting':
        return say(`${take.name}: begins in ${Math.ceil(options.countInUs / US_PER_S)} s`);
      case 'playing':
        // It goes on while the hand leads and the take waits.
        if (layer !== null && !begun) recorded?.start(layer.as, made);
        begun = true;
        return say(`${take.name}: plays`);
      case 'handed':
        return say('the hand leads; o gives back to the take');
      case 'over':
        recorded?.stop();
        company.sayLast({ text: `${take.name}: played; ${timing(running)}`, weight: 'note' });
        if (!options.stay) company.parkAndLeave();
    }
  };

  return {
    onStart: (drive, events$, clock) => recorded?.onStart(drive, events$, clock),
    begin(to) {
      company = to;
      recorded?.begin(to);
      running = player(to.live, to.clock, rows, {
        cast: own ?? score.cast,
        by: own === null ? score.by : 'commands',
        posed: score.posed,
        countInUs: options.countInUs,
        changed,
        passed: (mark) => recorded?.mark(mark),
      });
      changed('easing');
    },
    standing() {
      const also = recorded?.standing() ?? '';
      const plays = running === null ? '' : standingOf(take.name, running);
      return also === '' ? plays : `${plays}, ${also}`;
    },
    key(key) {
      if (key === 'hand_over') running?.handOver();
      else recorded?.key(key);
    },
    async end() {
      running?.stop();
      return (await recorded?.end()) ?? true;
    },
  };
}

function standingOf(name: string, { is }: Player): string {
  switch (is.phase) {
    case 'easing':
      return `easing in to ${name}`;
    case 'counting':
      return `${name} in ${Math.ceil(is.countUs / US_PER_S)} s`;
    case 'playing':
      return `playing ${name} ${Math.floor(is.atUs / US_PER_S)} s`;
    case 'handed':
      return `the hand leads, ${name} waits`;
    case 'over':
      return `${name} is over`;
  }
}

function ownCommands({ plan }: CompiledRig): Cast {
  return {
    leader: [],
    followers: plan.followers.map((spec, follower) => ({ follower, joints: spec.joints.map((_, j) => j) })),
  };
}

function timing(running: Player | null): string {
  if (running === null || running.late.count === 0) return 'nothing was sent';
  const { late } = running;
  const ms = (us: number): string => (us / 1e3).toFixed(2);
  return `${late.count} events, late by ${ms(late.quantileUs(0.5))} ms at the median, ${ms(late.quantileUs(0.99))} at p99, ${ms(late.worstUs)} at worst`;
}
