import type { RigProfiles } from '../rig/compile.ts';
import { servosOf } from '../rig/servo-list.ts';
import { byJoint, type Capture } from './captures.ts';
import { leaderCurve, servoCurve } from './curves.ts';
import { type Drift, driftOf } from './drift.ts';
import { round } from './words.ts';

/** How one map of a profile agrees with new captures; printed by `fit --check --json`. */
export interface DriftReport {
  readonly arm: string;
  readonly joint: string;
  readonly map: 'leader' | 'servo';
  readonly drifted: boolean;
  readonly shift_deg: number;
  readonly stretch_percent: number | null;
  readonly worst_deg: number;
  readonly points: number;
  /** What the profile says its map may be off by; null: it does not say. */
  readonly stated_error_deg: number | null;
}

/** Tests every map that captures have known angles for. */
export function checkCaptures(
  { leader, followers }: RigProfiles,
  captures: readonly Capture[],
): readonly DriftReport[] {
  return byJoint(captures).flatMap((group): readonly DriftReport[] => {
    const joint = leader.leader === group.arm ? leader.joints.find(({ name }) => name === group.joint) : undefined;
    const points = group.of['leader-point'];
    if (joint !== undefined && points.length > 0) {
      const value = leaderCurve(joint);
      const said = points.map(({ counts }) => value(counts));
      const drift = driftOf(said, known(points), joint.fitted?.error_deg ?? 0);
      return [drifted(group, 'leader', drift, joint.fitted?.error_deg)];
    }
    const profile = followers.find(({ follower }) => follower === group.arm);
    const turning = servosOf(profile ?? {}).find(({ turns }) => Object.keys(turns).join() === group.joint);
    const pulses = group.of['servo-point'];
    if (turning === undefined || pulses.length === 0) return [];
    const { points: servo, fitted } = turning.servo;
    const value = servoCurve(servo);
    const said = pulses.map(({ pulseUs }) => value(pulseUs));
    return [drifted(group, 'servo', driftOf(said, known(pulses), fitted?.error_deg ?? 0), fitted?.error_deg)];
  });
}

function known(points: readonly Capture[]): readonly number[] {
  return points.map(({ knownDeg }) => knownDeg);
}

function drifted(
  { arm, joint }: { readonly arm: string; readonly joint: string },
  map: DriftReport['map'],
  drift: Drift,
  stated: number | undefined,
): DriftReport {
  return {
    arm,
    joint,
    map,
    drifted: drift.drifted,
    shift_deg: drift.shiftDeg,
    stretch_percent: drift.stretchPercent,
    worst_deg: drift.worstDeg,
    points: drift.n,
    stated_error_deg: stated ?? null,
  };
}

/** One line for people. */
export function driftLine(report: DriftReport): string {
  const { arm, joint, map, shift_deg, stretch_percent, worst_deg, points } = report;
  const turned = stretch_percent === null ? '' : `, turn ${round(stretch_percent, 1)} % further`;
  const found = `${points} points lie ${round(shift_deg, 2)} deg from the map${turned}, at worst ${round(worst_deg, 2)} deg`;
  const what = `${arm} ${joint}${map === 'servo' ? ' (servo)' : ''}`;
  return report.drifted
    ? `${what}: has drifted; ${found}; fit it again, and look for a pot or a horn that has slipped`
    : `${what}: has not drifted; ${found}`;
}
