import type { Plan } from '../drive/plan.ts';
import { takeFault, type TakeFault } from './fault.ts';
import type { Take } from './reader.ts';

/** Who of a rig plays what of a take: for each present joint the place of its part in the take's rows. */
export interface Cast {
  /** Parallel to the leader's joints: index in the take's leader joints. */
  readonly leader: readonly number[];
  /** Parallel to the rig's followers; null: it has no part, and holds. */
  readonly followers: readonly (CastFollower | null)[];
}

export interface CastFollower {
  readonly follower: number;
  /** Parallel to the follower's joints: index in the take's joints. */
  readonly joints: readonly number[];
}

/** Names of the take by names of the rig, as `--map old=new` gives them: joints, followers, or `follower.joint`. */
export type Renames = ReadonlyMap<string, string>;

/** Reads `old=new` pairs; a text that is none comes back as a fault. */
export function renames(take: Take, pairs: readonly string[]): Renames | TakeFault {
  const map = new Map<string, string>();
  for (const pair of pairs) {
    const [was, is, ...more] = pair.split('=').map((part) => part.trim());
    if (was === undefined || is === undefined || was === '' || is === '' || more.length > 0)
      return takeFault('TAKE_JOINTS', take.name, `"${pair}" is no pair of names`);
    if (!hasPart(take, was)) {
      const { leader, followers } = take.header;
      const known = [...leader.joints, ...followers.map(({ name }) => name)].join(', ');
      return takeFault('TAKE_JOINTS', take.name, `it has no joint or follower ${was}, only ${known}`);
    }
    map.set(is, was);
  }
  return map;
}

function hasPart({ header: { leader, followers } }: Take, name: string): boolean {
  return (
    leader.joints.includes(name) ||
    followers.some((arm) => arm.name === name || arm.joints.some((joint) => joint.name === name))
  );
}

/** Casts a take's leader joints to a rig's leader: every joint of the rig needs a part. */
export function castLeader(take: Take, plan: Plan, map: Renames): readonly number[] | TakeFault {
  const parts = take.header.leader.joints;
  const places = plan.leader.joints.map(({ name }) => parts.indexOf(map.get(name) ?? name));
  const lacking = plan.leader.joints.find((_, j) => places[j] === -1);
  if (lacking === undefined) return places;
  return takeFault('TAKE_JOINTS', take.name, `it has no leader joint ${lacking.name}, only ${parts.join(', ')}`);
}

/** Casts a take's followers to those of a rig; one of the rig that is not in the take holds, but all of one must fit. */
export function castFollowers(take: Take, plan: Plan, map: Renames): Cast['followers'] | TakeFault {
  const found: (CastFollower | null)[] = [];
  for (const spec of plan.followers) {
    const name = map.get(spec.name) ?? spec.name;
    const follower = take.header.followers.findIndex((arm) => arm.name === name);
    const parts = take.header.followers[follower]?.joints.map((joint) => joint.name) ?? [];
    if (follower < 0) {
      found.push(null);
      continue;
    }
    const joints = spec.joints.map((joint) =>
      parts.indexOf(map.get(`${spec.name}.${joint.name}`) ?? map.get(joint.name) ?? joint.name),
    );
    const lacking = spec.joints.find((_, j) => joints[j] === -1);
    if (lacking !== undefined)
      return takeFault('TAKE_JOINTS', take.name, `${name} has no joint ${lacking.name}, only ${parts.join(', ')}`);
    found.push({ follower, joints });
  }
  if (found.some((part) => part !== null)) return found;
  const known = take.header.followers.map((arm) => arm.name).join(', ');
  return takeFault('TAKE_JOINTS', take.name, `none of the rig's followers is in it, only ${known}`);
}
