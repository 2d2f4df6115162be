import type { FollowerProfile } from '../schema/follower.ts';
import type { Loose } from '../shape.ts';
import type { Note } from './note.ts';
import { askedOfArm } from './whole-arm.ts';

/** Limits that a person relies on are not accepted in silence while nothing keeps them. */
export function notEnforcedRules(follower: Loose<FollowerProfile>, note: Note): void {
  if (!('arm' in follower)) return;
  for (const { key, what } of askedOfArm(follower)) {
    const wrong = `${what} is not yet enforced by this version`;
    note('RIG_NOT_ENFORCED', [key], wrong, 'remove it, and keep the speed down with speed_deg_s');
  }
}
