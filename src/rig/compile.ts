import type { Address } from '../port/address.ts';
import type { WireChoice } from '../wire/choice.ts';
import { addressOf, baudOf, groupByPort } from './boards.ts';
import { compileArm } from './compile-arm.ts';
import { compileFollower, outputWiring } from './compile-follower.ts';
import { compileLeader, inputWiring } from './compile-leader.ts';
import type { CompiledBoard, CompiledRig } from './compiled.ts';
import type { FollowerProfile } from './schema/follower.ts';
import type { LeaderProfile } from './schema/leader.ts';
import type { RigFrame } from './schema/rig.ts';
import { share } from './units.ts';
import { wireChoice } from './wire-choice.ts';

/** The profiles of a rig as their files say them, in the units of files, with `like:` and defaults filled in. */
export interface RigProfiles {
  readonly leader: LeaderProfile;
  readonly followers: readonly FollowerProfile[];
}

/** Compiles a rig that has passed every rule. Here and in what it calls, and nowhere else, units convert. */
export function compileRig(frame: RigFrame, profiles: RigProfiles): CompiledRig {
  const leader = compileLeader(profiles.leader);
  const { arm, joints } = profiles.leader;
  const leaderArm = arm === undefined ? null : compileArm(arm, joints);
  return {
    name: frame.rig,
    plan: {
      leader,
      followers: profiles.followers.map((follower) => compileFollower(follower, leader, leaderArm)),
      unison: frame.unison,
      pace: share(frame.pace),
    },
    boards: compileBoards(profiles),
  };
}

/** One board a port, the leader's first. */
function compileBoards({ leader, followers }: RigProfiles): readonly CompiledBoard[] {
  const profiles = [leader, ...followers];
  return groupByPort(profiles.map(({ port }) => port)).map((group) => {
    const leads = group[0] === 0;
    const members = group.filter((i) => i > 0).map((i) => i - 1);
    const first = profiles[group[0] ?? 0] ?? leader;
    const wire = wireChoice(first.wire);
    return {
      address: withBaud(first.port, wire),
      wire,
      plan: {
        boardName: group.map((i) => profiles[i]?.board).find((name) => name !== undefined) ?? null,
        inputs: leads ? inputWiring(leader) : null,
        outputs: members.flatMap((i) => outputWiring(followers[i] ?? {}) ?? []),
      },
      leads,
      followers: members,
    };
  });
}

function withBaud(port: string, wire: WireChoice): Address {
  const address = addressOf(port);
  if (address === null) throw new Error(`port ${port} passed the rules unread`);
  return address.kind === 'serial' ? { ...address, baud: baudOf(address, wire.name) } : address;
}
