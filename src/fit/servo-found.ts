import type { FollowerProfile } from '../rig/schema/follower.ts';
import { type Bench, type BenchServo, capturesOf } from './bench.ts';
import { leaderCurve } from './curves.ts';
import { servoFigures } from './figures.ts';
import { fitFollowerJoint } from './follower-part.ts';
import { fitLeaderJoint, type LeaderMap } from './leader-part.ts';
import { problemLine } from './problems.ts';

/**
 * Figures and sentences of a servo from what has been captured so far.
 * @param wanted how the figures begin that are told; null: all
 */
export function servoFound(bench: Bench, servo: BenchServo, wanted: readonly string[] | null): readonly string[] {
  const { servo: report, problems } = fitted(bench, servo);
  const figures = (report === null ? [] : servoFigures(report)).filter(
    ([what]) => wanted === null || wanted.some((begins) => what.startsWith(begins)),
  );
  return [
    ...figures.map(([what, value]) => `${servo.joint}: ${what}: ${value}`),
    ...(report?.notes ?? []).map((note) => `${servo.joint}: ! ${note}`),
    ...problems.map(problemLine),
  ];
}

/** A follower's joint as captured so far, with the leader's maps as far as they have been measured. */
export function fitted(bench: Bench, servo: BenchServo): ReturnType<typeof fitFollowerJoint> {
  const { leader, followers } = bench.profiles;
  const profile = followers[servo.follower] as FollowerProfile;
  const index = profile.joints.findIndex(({ name }) => name === servo.joint);
  const maps = new Map<string, LeaderMap>(
    leader.joints.map((joint, j) => {
      const captures = capturesOf(bench, leader.leader, joint.name);
      const map = captures.of['leader-point'].length > 0 ? fitLeaderJoint(leader, j, captures).map : leaderCurve(joint);
      return [joint.name, map];
    }),
  );
  return fitFollowerJoint(profile, index, capturesOf(bench, servo.arm, servo.joint), maps);
}
