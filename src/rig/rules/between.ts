import { nearest } from '../../port/nearest.ts';
import type { MistakeList, Place } from '../mistake.ts';
import { addressOf, baudOf, groupByPort } from '../boards.ts';
import type { LocatedNode } from '../located.ts';
import type { FollowerProfile } from '../schema/follower.ts';
import type { LeaderProfile } from '../schema/leader.ts';
import type { Loose } from '../shape.ts';
import { wireName } from '../wire-choice.ts';
import { followerChannels, leaderChannels } from './connection.ts';
import type { UsedChannel } from './connection.ts';
import type { Note } from './note.ts';

/** A profile of a rig with where the rig names it: what two profiles do to each other is told there. */
export interface Member<T> {
  readonly loose: Loose<T>;
  readonly entry: LocatedNode;
  readonly note: Note;
}

interface Tenant {
  readonly name: string;
  readonly port: string | undefined;
  readonly wire: Loose<FollowerProfile['wire']> | undefined;
  readonly board: string | undefined;
  readonly channels: readonly UsedChannel[];
  readonly entry: LocatedNode;
}

/** What only shows when the leader and its followers are seen together. */
export function betweenRules(
  leader: Member<LeaderProfile> | null,
  followers: readonly Member<FollowerProfile>[],
  mistakes: MistakeList,
): void {
  for (const follower of followers) {
    if (leader === null) break;
    sourceRule(follower, leader.loose);
    tipRule(follower, leader.loose);
  }
  const tenants = [...(leader === null ? [] : [leaderTenant(leader)]), ...followers.map(followerTenant)];
  nameRule(tenants, mistakes);
  for (const group of groupByPort(tenants.map(({ port }) => port))) {
    const sharing = group.flatMap((i) => tenants[i] ?? []);
    for (const [i, tenant] of sharing.entries()) sharedPortRule(tenant, sharing.slice(0, i), mistakes);
  }
}

function leaderTenant({ loose, entry }: Member<LeaderProfile>): Tenant {
  const { leader = 'the leader', port, wire, board } = loose;
  return { name: leader, port, wire, board, channels: leaderChannels(loose), entry };
}

function followerTenant({ loose, entry }: Member<FollowerProfile>): Tenant {
  const { follower = 'a follower', port, wire, board } = loose;
  return { name: follower, port, wire, board, channels: followerChannels(loose), entry };
}

function sourceRule({ loose, note }: Member<FollowerProfile>, leader: Loose<LeaderProfile>): void {
  const names = leader.joints?.map(({ name }) => name);
  const known = names?.filter((name) => name !== undefined);
  // Of a leader that is malformed itself, nobody can say what it lacks.
  if (known === undefined || known.length !== names?.length) return;
  for (const [i, { from }] of (loose.joints ?? []).entries()) {
    const sources = typeof from === 'string' ? [from] : Object.keys(from ?? {});
    for (const source of sources) {
      if (known.includes(source)) continue;
      const near = nearest(source, known);
      const right = near === null ? `its joints are ${known.join(', ')}` : `did you mean ${near}?`;
      const path = ['joints', i, 'from', ...(typeof from === 'string' ? [] : [source])];
      note('RIG_SOURCE_UNKNOWN', path, `the leader has no joint ${source}`, right);
    }
  }
}

/** A tip can only be followed where it is known. */
function tipRule({ loose, note }: Member<FollowerProfile>, leader: Loose<LeaderProfile>): void {
  if (loose.follow !== 'tip' || 'arm' in leader) return;
  const wrong = `follow: tip needs the geometry of ${leader.leader ?? 'the leader'}, whose file gives no arm`;
  note('RIG_TIP_LEADER', ['follow'], wrong, 'give arm: with its links in the leader file, or use follow: joints');
}

function nameRule(tenants: readonly Tenant[], mistakes: MistakeList): void {
  const seen = new Set<string>();
  for (const { name, entry } of tenants) {
    const right = 'name each differently; beside like:, write follower: with a name of its own';
    if (seen.has(name)) mistakes.add('RIG_NAME_TWICE', entryPlace(entry, 'follower'), `${name} is named twice`, right);
    seen.add(name);
  }
}

/** One port is one board: whoever shares it says the same about it, and takes other channels. */
function sharedPortRule(tenant: Tenant, former: readonly Tenant[], mistakes: MistakeList): void {
  const [first] = former;
  if (first === undefined) return;
  const place = entryPlace(tenant.entry, 'port');
  const differs = (what: string, mine: string, theirs: string): void => {
    if (mine === theirs) return;
    const wrong = `${tenant.name} says ${what} ${mine} of a port of which ${first.name} says ${theirs}`;
    mistakes.add('RIG_PORT_DIFFERS', place, wrong, 'one port is one board: say the same in both, or use another port');
  };
  const wires = [wireName(tenant.wire), wireName(first.wire)] as const;
  if (wires[0] === null || wires[1] === null) return;
  differs('wire', wires[0], wires[1]);
  if (wires[0] === wires[1]) differs('baud', baudText(tenant, wires[0]), baudText(first, wires[1]));
  differs('local port', localPortText(tenant), localPortText(first));
  const named = former.find(({ board }) => board !== undefined);
  if (tenant.board !== undefined && named?.board !== undefined) differs('board', tenant.board, named.board);
  overlapRule(tenant, former, place, mistakes);
}

function overlapRule(tenant: Tenant, former: readonly Tenant[], place: Place, mistakes: MistakeList): void {
  const taken = new Map<number, string>();
  for (const { name, channels } of former) {
    for (const { value, what } of channels) if (value !== undefined) taken.set(value, `${what} of ${name}`);
  }
  for (const { value, what } of tenant.channels) {
    const owner = value === undefined ? undefined : taken.get(value);
    if (owner === undefined) continue;
    const wrong = `channel ${value} for ${what} of ${tenant.name} is already that of ${owner}, on the same port`;
    mistakes.add('RIG_CHANNEL_TWICE', place, wrong, 'give each its own channel, or each follower its own port');
  }
}

function baudText({ port }: Tenant, wire: Parameters<typeof baudOf>[1]): string {
  const address = addressOf(port);
  return String(address === null ? null : baudOf(address, wire));
}

function localPortText({ port }: Tenant): string {
  const address = addressOf(port);
  return String((address?.kind === 'udp' ? address.localPort : null) ?? 'any');
}

/** In the rig's own file: a profile may stand in several rigs, and in one of them several times. */
function entryPlace(entry: LocatedNode, key: string): Place {
  return (entry.kind === 'map' ? entry.entries.get(key)?.value.place : undefined) ?? entry.place;
}
