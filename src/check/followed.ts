import type { FollowerJointSpec } from '../follower/spec.ts';
import type { LeaderSpec } from '../leader/spec.ts';
import { degreesOf } from '../rig/units.ts';
import { servosOf } from '../rig/servo-list.ts';
import type { FollowerSubject } from './subject.ts';

/** How much of the leader's travel a joint can follow, in the units of files. */
export interface FollowedJoint {
  /** Share of the travel that is followed, 0 to 1; null for a joint that copies nothing, reaches for a tip, or is alone. */
  readonly followed_share: number | null;
  /** What of the travel lies below and above the range, in degrees of this joint; null as above. */
  readonly clipped_deg: readonly [number, number] | null;
  /** Share of the range that the travel makes use of, 0 to 1; null as above. */
  readonly range_used_share: number | null;
  /** Degrees that the measured points of its servo span, the least if it has several. */
  readonly servo_span_deg: number;
}

/** Less than this is rounding, degrees. */
const ROUNDING_DEG = 1e-6;

export function followedJoints({ profile, spec, leader }: FollowerSubject): readonly FollowedJoint[] {
  const reaching = spec.whole?.tip?.reaching ?? [];
  return spec.joints.map((joint, j) => {
    const servo_span_deg = servoSpanDeg(profile, joint.name);
    const travel = leader === null || reaching.includes(j) ? null : wantedRad(joint, leader.spec);
    if (travel === null) return { followed_share: null, clipped_deg: null, range_used_share: null, servo_span_deg };
    const [low, high] = travel;
    const both = Math.max(0, Math.min(high, joint.maxRad) - Math.max(low, joint.minRad));
    return {
      followed_share: high > low ? both / (high - low) : null,
      clipped_deg: [tidy(joint.minRad - low), tidy(high - joint.maxRad)],
      range_used_share: both / (joint.maxRad - joint.minRad),
      servo_span_deg,
    };
  });
}

/** Where the leader's whole travel would bring a joint that had no range; null if it copies nothing. */
function wantedRad(
  { sources, gain, offsetRad }: FollowerJointSpec,
  leader: LeaderSpec,
): readonly [number, number] | null {
  if (sources.length === 0) return null;
  let low = offsetRad;
  let high = offsetRad;
  for (const { joint, weight } of sources) {
    const source = leader.joints[joint];
    if (source === undefined) continue;
    const ends = [source.travelMin, source.travelMax].map((counts) => gain * weight * source.map.value(counts));
    low += Math.min(...ends);
    high += Math.max(...ends);
  }
  return [low, high];
}

function tidy(clippedRad: number): number {
  const degrees = degreesOf(clippedRad);
  return degrees < ROUNDING_DEG ? 0 : degrees;
}

function servoSpanDeg(profile: FollowerSubject['profile'], joint: string): number {
  const spans = servosOf(profile).flatMap(({ servo, turns }) => {
    const weight = turns[joint];
    if (weight === undefined) return [];
    const angles = servo.points.map(([degrees]) => degrees);
    return [(Math.max(...angles) - Math.min(...angles)) / Math.abs(weight)];
  });
  return Math.min(...spans);
}
