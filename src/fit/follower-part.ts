import type { FollowerJoint, FollowerProfile } from '../rig/schema/follower.ts';
import { servosOf } from '../rig/servo-list.ts';
import type { JointCaptures } from './captures.ts';
import { servoCurve } from './curves.ts';
import { backlashOf, deadbandOf } from './deadband.ts';
import type { LeaderMap } from './leader-part.ts';
import { POINTS_ENOUGH } from './leader-part.ts';
import { matchPoses } from './match.ts';
import { figure, pointsReport } from './points-report.ts';
import { type FitProblem, noMapProblem, problem } from './problems.ts';
import type { MatchReport, ServoReport, TravelReport } from './report.ts';
import { fitServo } from './servo-fit.ts';
import { matchWords, pointsWords, servoWords } from './words.ts';

export interface FollowerPart {
  readonly servo: ServoReport | null;
  readonly match: MatchReport | null;
  readonly problems: readonly FitProblem[];
}

/** A protractor at a horn is read no better than this, degrees (common practice, no source). */
const READ_DEG = 0.2;

/** @param mapOf the leader's maps, fitted or as they were, by joint name */
export function fitFollowerJoint(
  profile: FollowerProfile,
  index: number,
  captures: JointCaptures,
  mapOf: ReadonlyMap<string, LeaderMap>,
): FollowerPart {
  const joint = profile.joints[index] as FollowerJoint;
  const arm = profile.follower;
  const wantsServo = captures.of['servo-point'].length > 0;
  const steps = captures.of['servo-step'].map(({ pulseUs, moved }) => ({ pulseUs, moved: moved !== 0 }));
  const wantsMatch = captures.of.match.length > 0;
  const listed = servoAlone(profile, joint.name);
  if (listed === null) {
    const wrong = 'no servo turns this joint alone';
    const problems =
      wantsServo || wantsMatch || steps.length > 0 ? [problem('FIT_NO_SERVO', arm, joint.name, wrong)] : [];
    return { servo: null, match: null, problems };
  }
  const problems: FitProblem[] = [];
  const complain = (found: FitProblem): null => {
    problems.push(found);
    return null;
  };
  const former = servoCurve(listed.points);
  const points = captures.of['servo-point'].map(({ pulseUs, knownDeg }) => ({ pulseUs, angleDeg: knownDeg }));
  const fit = wantsServo ? fitServo(points, former, READ_DEG) : null;
  const found = fit !== null && 'why' in fit ? complain(noMapProblem(fit, arm, joint.name, 'us')) : fit;
  const angleOf = found?.map.value ?? former;
  const travel: TravelReport | null =
    found === null
      ? null
      : {
          points: pointsReport(
            found.map,
            points.map((p) => p.pulseUs),
            points.map((p) => p.angleDeg),
            null,
          ),
          travel_deg: found.travelDeg,
          nominal_deg: found.nominalDeg,
          between_us: found.betweenUs,
          lost_motion_deg: found.lostMotionDeg === null ? null : figure(found.lostMotionDeg),
        };
  const deadband = deadbandOf(steps);
  const lost = found?.lostMotionDeg ?? null;
  const backlash =
    found === null || lost === null || deadband === null
      ? null
      : backlashOf(lost, deadband.is * Math.abs(found.map.slope.is));
  const measured = {
    follower: arm,
    joint: joint.name,
    channel: listed.channel,
    travel,
    deadband_us: deadband === null ? null : figure(deadband),
    backlash_deg: backlash === null ? null : figure(backlash),
  };
  const servo: ServoReport | null =
    travel === null && steps.length === 0
      ? null
      : { ...measured, notes: servoWords(measured, POINTS_ENOUGH, steps.length) };
  const match = wantsMatch ? matched(profile, joint, captures, angleOf, mapOf, complain) : null;
  return { servo, match, problems };
}

/** The servo that turns a joint and no other, if it is the only one that does. */
export function servoAlone(
  profile: FollowerProfile,
  name: string,
): { channel: number; points: [number, number][] } | null {
  const turning = servosOf(profile).filter(({ turns }) => turns[name] !== undefined);
  const only = turning.length === 1 ? turning[0] : undefined;
  if (only === undefined || Object.keys(only.turns).length !== 1 || only.turns[name] !== 1) return null;
  return only.servo;
}

function matched(
  profile: FollowerProfile,
  joint: FollowerJoint,
  captures: JointCaptures,
  angleOf: (pulseUs: number) => number,
  mapOf: ReadonlyMap<string, LeaderMap>,
  complain: (found: FitProblem) => null,
): MatchReport | null {
  const arm = profile.follower;
  const from = typeof joint.from === 'string' ? joint.from : null;
  const map = from === null ? undefined : mapOf.get(from);
  if (from === null || map === undefined)
    return complain(problem('FIT_WEIGHTED', arm, joint.name, 'it copies no single joint of the leader'));
  if (joint.stretch) return complain(problem('FIT_STRETCHED', arm, joint.name, 'it is stretched over its range'));
  const pairs = captures.of.match.map(({ counts, pulseUs }) => ({
    leaderDeg: map(counts),
    followerDeg: angleOf(pulseUs),
  }));
  const match = matchPoses(pairs);
  if ('why' in match) return complain(noMapProblem(match, arm, joint.name, 'us'));
  const found = {
    follower: arm,
    joint: joint.name,
    from,
    direction: match.direction,
    was: joint.direction,
    gain: figure(match.gain),
    offset_deg: figure(match.offsetDeg),
    points: pointsReport(
      match.fit,
      pairs.map((p) => p.followerDeg),
      pairs.map((p) => p.leaderDeg),
      null,
    ),
  };
  return {
    ...found,
    notes: [...matchWords(found), ...pointsWords(found.points, 'deg of the follower', POINTS_ENOUGH)],
  };
}
