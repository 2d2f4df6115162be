import type { FollowerProfile } from '../rig/schema/follower.ts';
import type { JointLoad } from './load.ts';

/** What an arm does when its pulses end, and when its power does. */
export interface Endings {
  readonly on_lost_pulse: FollowerProfile['on_lost_pulse'];
  readonly stop_category: FollowerProfile['stop_category'];
  /** Joints that give way without their motors somewhere in their range: their load is more than their drag. */
  readonly falling: readonly string[];
  /** Joints of which that cannot be told. */
  readonly falling_unknown: readonly string[];
  readonly pulses_end: string;
  readonly power_ends: string;
}

/** Less than this moves nothing, newton metres. */
const NOTHING_NM = 1e-6;

export function endingsOf(profile: FollowerProfile, loads: readonly JointLoad[]): Endings {
  const names = profile.joints.map(({ name }) => name);
  const links = profile.arm?.links.map(({ joint }) => joint) ?? [];
  const falling: string[] = [];
  const unknown: string[] = [];
  for (const [j, name] of names.entries()) {
    const { load_worst_nm: worst, drag_nm: drag } = loads[j] as JointLoad;
    // A joint without a link carries nothing that the file knows of.
    if (worst === null || drag === null) {
      if (profile.arm === undefined || links.includes(name)) unknown.push(name);
    } else if (worst > drag + NOTHING_NM) falling.push(name);
  }
  const falls = fallText(falling, unknown);
  return {
    on_lost_pulse: profile.on_lost_pulse,
    stop_category: profile.stop_category,
    falling,
    falling_unknown: unknown,
    pulses_end: pulsesText(profile, falls),
    power_ends: `no servo holds: ${falls}`,
  };
}

function pulsesText({ on_lost_pulse }: FollowerProfile, falls: string): string {
  switch (on_lost_pulse) {
    case 'limp':
      return `the servos go limp: ${falls}`;
    case 'hold':
      return 'the servos hold where they are while they have power';
    case 'unknown':
      return `what the servos do is not known: if they go limp, ${falls}`;
  }
}

function fallText(falling: readonly string[], unknown: readonly string[]): string {
  const falls =
    falling.length === 0
      ? 'no load outweighs its joint’s drag'
      : `${listed(falling)} ${falling.length === 1 ? 'gives' : 'give'} way, and whatever hangs there falls`;
  if (unknown.length === 0) return falls;
  const open = `of ${listed(unknown)} it cannot be told`;
  return falling.length === 0 ? open : `${falls}; ${open}`;
}

export function listed(names: readonly string[]): string {
  return names.length < 2 ? names.join('') : `${names.slice(0, -1).join(', ')} and ${names.at(-1)}`;
}
