import { withFollowers } from '../bridge/selection.ts';
import type { CompiledRig } from '../rig/compiled.ts';
import { type Cast, castFollowers, castLeader, renames } from '../take/cast.ts';
import { type Stretch, stretchOf } from '../take/derive.ts';
import { isTakeFault, type TakeFault, takeFault } from '../take/fault.ts';
import type { Take } from '../take/reader.ts';
import type { PlayOptions } from './take-play-options.ts';

/** What is played, by whom. */
export interface Score extends Stretch {
  readonly cast: Cast;
  readonly by: 'leader' | 'commands';
  readonly speed: number;
  /** 1 for each leader joint that the take leads. */
  readonly posed: Uint8Array;
}

/** The rig with those who have a part, and without an enable button where nobody is there to hold it. */
export function castRig(take: Take, rig: CompiledRig, { map, by, unattended }: PlayOptions): CompiledRig | TakeFault {
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

export function scoreFor(take: Take, rig: CompiledRig, options: PlayOptions): Score | TakeFault {
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
