import { brief, DASH, fixed, percent } from './figures.ts';
import type { CheckedLeader } from './leader.ts';
import type { CheckedFollower, CheckedJoint, Report } from './checked.ts';
import { table } from './table.ts';

/** The report as lines for people, and for the wall. */
export function reportLines({ leader, followers, over, warnings }: Report): readonly string[] {
  return [
    ...(leader === null ? [] : ['', ...leaderLines(leader)]),
    ...followers.flatMap((follower) => ['', ...followerLines(follower)]),
    ...(warnings.length === 0 ? [] : ['', ...warnings.map((sentence) => `note  ${sentence}`)]),
    ...(over.length === 0 ? [] : ['', ...over.map((sentence) => `OVER  ${sentence}`)]),
  ];
}

function leaderLines({ leader, wire, port, reach_mm, joints, buttons, ...rest }: CheckedLeader): readonly string[] {
  const pressed = buttons.map(({ button, does }) => `, ${button} (${does})`).join('');
  const reach = reach_mm === null ? '' : `; reach ${fixed(reach_mm, 0)} mm`;
  const { readings_hz_max: most, baud_for_1000_hz: baud } = rest;
  const readings =
    most === null
      ? []
      : [`  its line of columns fits ${fixed(most, 0)} times a second; 1000 times would take ${fixed(baud, 0)} baud`];
  return [
    `leader ${leader}: ${wire} on ${port}; ${joints.map(({ joint }) => joint).join(', ')}${pressed}${reach}`,
    ...readings,
  ];
}

const STOPS = ['power is removed at once', 'brakes, then power is removed', 'brakes, then holds'] as const;
const WAKES = {
  ask: 'waits for the go in the pose that is shown',
  rest: 'goes to its rest pose without asking',
  last: 'assumes its last pose without asking',
} as const;

function followerLines(checked: CheckedFollower): readonly string[] {
  const { follower, wire, port, command_bytes, rate_hz, baud, baud_share, stop_category, wake } = checked;
  const taken = baud === null || baud_share === null ? '' : `, ${percent(baud_share)} of ${baud} baud`;
  return [
    `follower ${follower}: ${wire} on ${port}; ${command_bytes} bytes ${rate_hz} times a second${taken}`,
    ...sizeLines(checked),
    ...motionTable(checked.joints),
    ...resolutionTable(checked.joints),
    ...loadTable(checked.joints),
    ...standingLines(checked),
    ...supplyLines(checked),
    `  stop category ${stop_category}: ${STOPS[stop_category]}; waking, it ${WAKES[wake]}`,
    `  when pulses end, ${checked.pulses_end}`,
    `  when power ends, ${checked.power_ends}`,
  ];
}

function sizeLines({ reach_mm, scale, time_factor, ...rest }: CheckedFollower): readonly string[] {
  if (reach_mm === null) return ['  no arm: in its file: reach, speed, load and tipping cannot be told'];
  const size =
    scale === null
      ? ''
      : `, ${brief(scale)} times the leader's; it moves and loads alike in ${brief(time_factor)} times the time`;
  const { end_speed_max_mm_s: speed, end_speed_uncapped_mm_s: uncapped, end_speed_cap_mm_s: cap, stopping_mm } = rest;
  const capped = cap === null ? '' : `, capped from ${fixed(uncapped, 0)}`;
  const { tip_followed_share: tip, tip_left_mm: left, tip_mm_per_count: count } = rest;
  return [
    `  reach ${fixed(reach_mm, 0)} mm${size}`,
    `  no link end is faster than ${fixed(speed, 0)} mm/s${capped}; all of it stops within ${fixed(stopping_mm, 0)} mm`,
    ...(tip === null
      ? []
      : [
          `  its tip follows the leader's in ${percent(tip)} of its places, and stays up to ${fixed(left, 0)} mm behind; a count moves it by up to ${fixed(count, 2)} mm`,
        ]),
  ];
}

function motionTable(joints: readonly CheckedJoint[]): readonly string[] {
  return table(
    ['joint', 'follows', 'clipped deg', 'range deg', 'rest deg', 'deg/s', 'deg/s2', 'stops deg', 'stops mm'],
    joints.map((joint) => [
      joint.joint,
      percent(joint.followed_share),
      clippedText(joint),
      joint.range_deg.join('..'),
      String(joint.rest_deg),
      String(joint.speed_deg_s),
      String(joint.accel_deg_s2),
      fixed(joint.stopping_deg, 2),
      fixed(joint.stopping_mm, 1),
    ]),
    '    ',
  );
}

function clippedText({ clipped_deg }: CheckedJoint): string {
  if (clipped_deg === null) return DASH;
  const [low, high] = clipped_deg;
  return low === 0 && high === 0 ? 'none' : `${fixed(low, 0)} / ${fixed(high, 0)}`;
}

/** Degrees of the joint for one count; the rest as it shows at the tip. */
function resolutionTable(joints: readonly CheckedJoint[]): readonly string[] {
  return table(
    ['joint', 'count deg', 'count mm', 'noise mm', 'smoothed mm', 'deadband mm', 'wire mm', 'servo mm', 'worst'],
    joints.map((joint) => [
      joint.joint,
      brief(joint.count_deg),
      ...[joint.mm_per_count, joint.noise_mm, joint.smoothed_mm, joint.deadband_mm, joint.wire_mm, joint.servo_mm].map(
        (mm) => fixed(mm, 2),
      ),
      joint.resolution_worst ?? DASH,
    ]),
    '    ',
  );
}

function loadTable(joints: readonly CheckedJoint[]): readonly string[] {
  if (joints.every(({ load_worst_nm }) => load_worst_nm === null)) return [];
  return table(
    ['joint', 'empty Nm', 'full Nm', 'to hold', 'moving Nm', 'to move', 'highest at deg'],
    joints.map((joint) => [
      joint.joint,
      fixed(joint.load_empty_nm, 3),
      fixed(joint.load_full_nm, 3),
      percent(joint.load_share),
      fixed(joint.moving_worst_nm, 3),
      percent(joint.moving_share),
      joint.load_worst_pose_deg?.map((angle) => fixed(angle, 0)).join(' ') ?? DASH,
    ]),
    '    ',
  );
}

function standingLines({ tipping_margin_nm, tipping_static_nm, sliding_margin_n }: CheckedFollower): readonly string[] {
  if (tipping_margin_nm === null) return [];
  const sliding =
    sliding_margin_n === null ? '' : `; ${fixed(sliding_margin_n, 1)} N of friction are left before it slides`;
  return [
    `  ${fixed(tipping_static_nm, 2)} Nm hold it down standing still, ${fixed(tipping_margin_nm, 2)} Nm at its accelerations${sliding}`,
  ];
}

function supplyLines(checked: CheckedFollower): readonly string[] {
  const { supply_one_by_one_a: one, supply_moving_a: moving, supply_worst_a: all, supply_a: can } = checked;
  if (one === null && moving === null && all === null) return [];
  const of = can === null ? '' : `, of ${fixed(can, 1)} A`;
  return [
    `  it draws up to ${fixed(one, 1)} A as servos start one by one, ${fixed(moving, 1)} A as all joints move, ${fixed(all, 1)} A all at once${of}`,
  ];
}
