import type { CompiledRig } from '../../src/rig/compiled.ts';
import { castFollowers, castLeader, renames } from '../../src/take/cast.ts';
import { isTakeFault } from '../../src/take/fault.ts';
import { type Phase, type Player, player, type PlayerOptions } from '../../src/take/player.ts';
import type { Take } from '../../src/take/reader.ts';
import { reel, type ReelOptions } from '../../src/take/reel.ts';
import { Performance } from '../bridge/performance.ts';

/** A take that plays on a simulated rig, and what the arms were told. */
export interface Played {
  readonly performance: Performance;
  readonly player: Player;
  readonly phases: Phase[];
  /** Each move of a follower: when, and where to. */
  readonly moves: { tUs: number; follower: number; x: Float64Array; v: Float64Array; pulses: Float64Array }[];
}

export interface PlayingOptions extends Partial<PlayerOptions> {
  readonly map?: readonly string[];
  readonly reel?: Partial<ReelOptions>;
}

/** Plays 3 s to 8 s of a take, unless told otherwise, once the arms have followed the hand for a while. */
export function playingOf(take: Take, rig: CompiledRig, options: PlayingOptions = {}, handUs = 1_000_000): Played {
  const map = renames(take, options.map ?? []);
  if (isTakeFault(map)) throw new Error(map.detail);
  const by = options.by ?? 'leader';
  const leader = castLeader(take, rig.plan, map);
  const followers = castFollowers(take, rig.plan, map);
  const moves: Played['moves'] = [];
  const phases: Phase[] = [];
  const performance = new Performance(rig, {
    onStart: (drive, events$) => {
      const commands = drive.followers.map((f) => f.commands);
      events$.subscribe(() => {
        drive.followers.forEach((f) => {
          if (f.commands === commands[f.index]) return;
          commands[f.index] = f.commands;
          if (f.kind !== 'move') return;
          moves.push({
            tUs: drive.common.nowUs[0] as number,
            follower: f.index,
            x: f.arm.governor.x.slice(),
            v: f.arm.governor.v.slice(),
            pulses: f.arm.frame.sentUs.slice(),
          });
        });
      });
    },
  });
  performance.run(handUs);
  const rows = reel(take, { fromUs: 3_000_000, toUs: 8_000_000, speed: 1, loopBlendS: null, ...options.reel });
  const started = player(performance.live, performance.clock, rows, {
    cast: {
      leader: isTakeFault(leader) ? [] : leader,
      followers: isTakeFault(followers) ? [] : followers,
    },
    by,
    posed: new Uint8Array(rig.plan.leader.joints.length).fill(1),
    countInUs: 1_000_000,
    changed: (phase) => phases.push(phase),
    ...options,
  });
  return { performance, player: started, phases, moves };
}

/** Runs until the player has come to a phase, and says when. */
export function until({ performance, player: { is } }: Played, phase: Phase, limitS = 60): number {
  for (let s = 0; s < limitS * 100 && is.phase !== phase; s++) performance.run(10_000);
  if (is.phase !== phase) throw new Error(`it is still ${is.phase}`);
  return performance.clock.nowUs();
}
