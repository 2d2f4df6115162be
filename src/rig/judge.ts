import type { LocatedNode } from './located.ts';
import type { MistakeList } from './mistake.ts';
import { armRules } from './rules/arm.ts';
import type { Member } from './rules/between.ts';
import { followerConnectionRules, leaderConnectionRules } from './rules/connection.ts';
import { followerRules } from './rules/follower.ts';
import { leaderRules } from './rules/leader.ts';
import { noteIn } from './rules/note.ts';
import { rateRule, samplingRule } from './rules/rates.ts';
import { servoRules } from './rules/servos.ts';
import { separatorRule, textRules } from './rules/texts.ts';
import { geometryRules, poseRules } from './rules/whole-arm.ts';
import { follower } from './schema/follower.ts';
import type { FollowerProfile } from './schema/follower.ts';
import { leader } from './schema/leader.ts';
import type { LeaderProfile } from './schema/leader.ts';
import { shapeOf } from './shape.ts';

/** A profile after all rules that it can be held against alone; `whole` is null if it is malformed. */
export interface Judged<T> extends Member<T> {
  readonly whole: T | null;
}

const leaderShape = shapeOf(leader);
const followerShape = shapeOf(follower);

/** @param entry where the rig (or the profile's own file) names it */
export function judgeLeader(node: LocatedNode, entry: LocatedNode, mistakes: MistakeList): Judged<LeaderProfile> {
  const { whole, loose } = leaderShape(node, mistakes);
  const note = noteIn(node, mistakes);
  leaderRules(loose, note);
  leaderConnectionRules(loose, note);
  armRules(loose, note);
  separatorRule(loose, note);
  samplingRule(loose, note);
  return { whole, loose, entry, note };
}

/** @param entry where the rig (or the profile's own file) names it */
export function judgeFollower(node: LocatedNode, entry: LocatedNode, mistakes: MistakeList): Judged<FollowerProfile> {
  const { whole, loose } = followerShape(node, mistakes);
  const note = noteIn(node, mistakes);
  followerRules(loose, note);
  servoRules(loose, note);
  followerConnectionRules(loose, note);
  textRules(loose, note);
  separatorRule(loose, note);
  armRules(loose, note);
  geometryRules(loose, note);
  if (whole !== null) poseRules(whole, note);
  rateRule(loose, note);
  return { whole, loose, entry, note };
}
