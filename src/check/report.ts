import { reachM } from '../arm/extent.ts';
import { timeFactor } from '../arm/scale.ts';
import { wakeOf } from '../rig/compile-follower.ts';
import type { LoadedProfile, LoadedRig } from '../rig/load.ts';
import { commandLoad } from '../rig/rules/rates.ts';
import { millimetresOf } from '../rig/units.ts';
import { wireName } from '../rig/wire-choice.ts';
import type { CheckedFollower, Report } from './checked.ts';
import { endingsOf } from './endings.ts';
import { followedJoints } from './followed.ts';
import type { FollowedJoint } from './followed.ts';
import { followedTip } from './followed-tip.ts';
import { checkedLeader } from './leader.ts';
import type { CheckedLeader } from './leader.ts';
import { jointLoads } from './load.ts';
import type { JointLoad } from './load.ts';
import { looking } from './looking.ts';
import { armMotion, jointMotions } from './motion.ts';
import type { JointMotion } from './motion.ts';
import { overLimits } from './over.ts';
import { atTheTip, resolutionOf } from './resolution.ts';
import { standing } from './standing.ts';
import { followerAlone, leaderSubject, rigSubjects } from './subject.ts';
import type { FollowerSubject } from './subject.ts';
import { supplyOf } from './supply.ts';
import { boardWarnings, followerWarnings } from './warnings.ts';

/** The pre-flight report of a rig or a profile that is without mistakes. */
export function reportOf(loaded: LoadedRig | LoadedProfile): Report {
  return readable(report(loaded));
}

/** A search and a change of units leave crumbs far behind the comma that nobody measures. */
function readable<T>(value: T): T {
  if (typeof value === 'number') return Number(value.toPrecision(DIGITS)) as T;
  if (Array.isArray(value)) return value.map(readable) as T;
  if (typeof value !== 'object' || value === null) return value;
  return Object.fromEntries(Object.entries(value).map(([key, inner]) => [key, readable(inner)])) as T;
}

const DIGITS = 9;

function report(loaded: LoadedRig | LoadedProfile): Report {
  switch (loaded.kind) {
    case 'leader':
      return { leader: checkedLeader(leaderSubject(loaded.leader)), followers: [], over: [], warnings: [] };
    case 'follower':
      return followersReport([followerAlone(loaded.follower)], null, []);
    case 'rig':
      return followersReport(
        rigSubjects(loaded),
        checkedLeader(leaderSubject(loaded.profiles.leader)),
        boardWarnings(loaded.rig.boards),
      );
  }
}

function followersReport(
  subjects: readonly FollowerSubject[],
  leader: CheckedLeader | null,
  aboutBoards: readonly string[],
): Report {
  const pairs = subjects.map((subject) => [subject, checkedFollower(subject)] as const);
  return {
    leader,
    followers: pairs.map(([, checked]) => checked),
    over: pairs.flatMap(([{ profile }, checked]) => overLimits(profile, checked)),
    warnings: [...pairs.flatMap(([{ profile }, checked]) => followerWarnings(profile, checked)), ...aboutBoards],
  };
}

function checkedFollower(subject: FollowerSubject): CheckedFollower {
  const { profile, spec, leader } = subject;
  const { bytes = 0, baud = null, bitsPerS = 0 } = commandLoad(profile) ?? {};
  const whole = spec.whole ?? null;
  const look = whole === null ? null : looking(whole, spec.joints);
  const motions = jointMotions(spec.joints, whole, look);
  const loads = jointLoads(whole?.arm ?? null, profile.arm, spec.joints, look);
  const followed = followedJoints(subject);
  const reach = whole === null ? null : reachM(whole.arm);
  const scale = reach === null || leader?.arm === undefined || leader.arm === null ? null : reach / reachM(leader.arm);
  return {
    follower: profile.follower,
    port: profile.port,
    wire: wireName(profile.wire),
    rate_hz: profile.rate_hz,
    command_bytes: bytes,
    baud,
    baud_share: baud === null ? null : bitsPerS / baud,
    wake: wakeOf(profile),
    follow: profile.follow,
    reach_mm: reach === null ? null : millimetresOf(reach),
    scale,
    time_factor: scale === null ? null : timeFactor(scale),
    ...followedTip(subject),
    ...armMotion(whole, spec.joints, look, motions),
    ...standing(whole?.arm ?? null, spec.joints, look),
    ...supplyOf(profile, whole?.arm ?? null, loads),
    ...endingsOf(profile, loads),
    joints: profile.joints.map(({ name, range_deg, rest_deg, speed_deg_s, accel_deg_s2 }, j) => {
      const motion = motions[j] as JointMotion;
      const resolution = resolutionOf(subject, j);
      return {
        joint: name,
        range_deg,
        rest_deg,
        speed_deg_s,
        accel_deg_s2,
        ...(followed[j] as FollowedJoint),
        ...motion,
        ...resolution,
        ...atTheTip(resolution, motion.tip_lever_mm),
        ...(loads[j] as JointLoad),
      };
    }),
  };
}
