import type { RigProfiles } from '../rig/compile.ts';
import { byJoint, type Capture, type JointCaptures } from './captures.ts';
import { leaderCurve } from './curves.ts';
import { medianOf } from './dwells.ts';
import { fitFollowerJoint } from './follower-part.ts';
import { fitLeaderJoint, type LeaderMap } from './leader-part.ts';
import { type FitProblem, problem } from './problems.ts';
import type { FitReport } from './report.ts';
import type { SuggestWish } from './suggest.ts';
import { suggestions } from './suggest-part.ts';

export interface FitOptions {
  readonly rig: string;
  /** As the profiles will say it: 2026-12-01. */
  readonly date: string;
  readonly wish: SuggestWish;
}

/** Readings a second where neither the captures nor the profile tell (common practice, no source). */
const RATE_HZ = 100;

/** Everything that captures say about a rig: maps with their errors, and problems where there is no map. */
export function fitCaptures(profiles: RigProfiles, captures: readonly Capture[], options: FitOptions): FitReport {
  const { leader, followers } = profiles;
  const problems: FitProblem[] = [];
  const groups = byJoint(captures);
  const known =
    (arm: string, names: readonly string[]) =>
    (group: JointCaptures): boolean => {
      if (group.arm !== arm) return false;
      if (names.includes(group.joint)) return true;
      problems.push(problem('FIT_UNKNOWN_JOINT', arm, group.joint, `${arm} has ${names.join(', ')}`));
      return false;
    };
  const arms = [leader.leader, ...followers.map(({ follower }) => follower)];
  for (const arm of new Set(groups.map((group) => group.arm).filter((name) => !arms.includes(name))))
    problems.push(problem('FIT_UNKNOWN_ARM', arm, '', `the rig has ${arms.join(', ')}`));

  const leaderNames = leader.joints.map(({ name }) => name);
  const parts = groups.filter(known(leader.leader, leaderNames)).map((group) => {
    const part = fitLeaderJoint(leader, leaderNames.indexOf(group.joint), group);
    problems.push(...part.problems);
    return part;
  });
  const maps = new Map<string, LeaderMap>(leader.joints.map((joint) => [joint.name, leaderCurve(joint)]));
  for (const { report, map } of parts) maps.set(report.joint, map);

  const fitted = followers.flatMap((profile) => {
    const names = profile.joints.map(({ name }) => name);
    return groups.filter(known(profile.follower, names)).map((group) => {
      const part = fitFollowerJoint(profile, names.indexOf(group.joint), group, maps);
      problems.push(...part.problems);
      return part;
    });
  });
  const joints = parts.map(({ report }) => report);
  const matches = fitted.flatMap(({ match }) => match ?? []);
  return {
    rig: options.rig,
    date: options.date,
    joints,
    servos: fitted.flatMap(({ servo }) => servo ?? []),
    matches,
    suggestions: suggestions(profiles, joints, matches, options.wish, rateOf(captures, profiles)),
    problems,
  };
}

function rateOf(captures: readonly Capture[], { leader }: RigProfiles): number {
  const still = captures.filter(({ step, tMs }) => step === 'leader-still' && !Number.isNaN(tMs));
  const steps = still.slice(1).flatMap(({ tMs, joint }, i) => {
    const before = still[i] as Capture;
    return joint === before.joint && tMs > before.tMs ? [tMs - before.tMs] : [];
  });
  if (steps.length > 0) return 1000 / medianOf(steps);
  return leader.wire === 'firmata' ? 1000 / leader.sampling_ms : RATE_HZ;
}
