import { armSheet } from '../draw/sheet.ts';
import type { SheetRow } from '../draw/sheet.ts';
import { radians } from '../rig/units.ts';
import { brief, fixed, percent } from './figures.ts';
import type { LoadedProfile, LoadedRig } from '../rig/load.ts';
import type { CheckedFollower, CheckedJoint, Report } from './checked.ts';
import { followerAlone, rigSubjects } from './subject.ts';
import type { FollowerSubject } from './subject.ts';

/** The arms of a rig or a profile as a sheet of elevations; null if no follower's file gives its geometry. */
export function reportDrawing(loaded: LoadedRig | LoadedProfile, { followers }: Report): string | null {
  if (loaded.kind === 'leader') return null;
  const subjects = loaded.kind === 'rig' ? rigSubjects(loaded) : [followerAlone(loaded.follower)];
  const rows = subjects.flatMap((subject, i) => rowOf(subject, followers[i]));
  const title = loaded.kind === 'rig' ? loaded.rig.name : loaded.follower.follower;
  return rows.length === 0 ? null : armSheet(title, rows);
}

function rowOf({ spec, profile }: FollowerSubject, checked: CheckedFollower | undefined): readonly SheetRow[] {
  const { whole, joints } = spec;
  if (whole === undefined || checked === undefined) return [];
  const rest = { label: 'rest', anglesRad: Float64Array.from(joints, ({ restRad }) => restRad) };
  const loaded = mostLoaded(checked.joints);
  const pose = loaded?.load_worst_pose_deg ?? null;
  const highest =
    loaded === null || pose === null
      ? []
      : [{ label: `highest load on ${loaded.joint}`, anglesRad: Float64Array.from(pose, radians) }];
  return [
    {
      title: `${profile.follower}: ${fixed(checked.reach_mm, 0)} mm reach`,
      arm: whole.arm,
      ranges: joints,
      keepOut: whole.keepOut,
      poses: [rest, ...highest],
      figures: figuresOf(checked, loaded),
    },
  ];
}

/** The joint nearest to, or farthest over, what it may hold; without any motor, the one with the highest torque. */
function mostLoaded(joints: readonly CheckedJoint[]): CheckedJoint | null {
  const by = (value: (joint: CheckedJoint) => number | null): CheckedJoint | null =>
    joints.reduce<CheckedJoint | null>((most, joint) => {
      const here = value(joint);
      return here !== null && here > (most === null ? 0 : (value(most) ?? 0)) ? joint : most;
    }, null);
  return by(({ load_share }) => load_share) ?? by(({ load_worst_nm }) => load_worst_nm);
}

function figuresOf(checked: CheckedFollower, loaded: CheckedJoint | null): SheetRow['figures'] {
  const all: readonly (readonly [string, string | null, boolean])[] = [
    ['scale to the leader', checked.scale === null ? null : `${brief(checked.scale)} : 1`, false],
    ['time factor (Froude)', checked.time_factor === null ? null : brief(checked.time_factor), false],
    ['fastest link end', `${fixed(checked.end_speed_max_mm_s, 0)} mm/s`, false],
    ['all of it stops within', `${fixed(checked.stopping_mm, 0)} mm`, false],
    [
      `highest load, on ${loaded?.joint ?? ''}`,
      loaded === null ? null : `${fixed(loaded.load_worst_nm, 2)} Nm, ${percent(loaded.load_share)} of its motor's`,
      (loaded?.load_share ?? 0) > 1,
    ],
    marginFigure('held down by', checked.tipping_margin_nm, 'Nm'),
    marginFigure('friction left over', checked.sliding_margin_n, 'N'),
    [
      'current, all joints moving',
      checked.supply_moving_a === null
        ? null
        : `${fixed(checked.supply_moving_a, 1)} A of ${fixed(checked.supply_a, 1)} A`,
      (checked.supply_moving_a ?? 0) > (checked.supply_a ?? Number.POSITIVE_INFINITY),
    ],
    ['when pulses end', checked.on_lost_pulse === 'unknown' ? 'not known' : checked.on_lost_pulse, false],
  ];
  return all.flatMap(([what, value, marked]) => (value === null ? [] : [{ what, value, marked }]));
}

function marginFigure(what: string, margin: number | null, unit: string): readonly [string, string | null, boolean] {
  return [what, margin === null ? null : `${fixed(margin, 1)} ${unit}`, (margin ?? 0) < 0];
}
