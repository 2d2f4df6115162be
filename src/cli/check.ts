import { Command } from '@commander-js/extra-typings';
import type { CommandUnknownOpts } from '@commander-js/extra-typings';
import { wakeOf } from '../rig/compile-follower.ts';
import { readFromDisk } from '../rig/file-reader.ts';
import type { ReadFile } from '../rig/file-reader.ts';
import { loadProfile } from '../rig/load.ts';
import { mistakeLine } from '../rig/mistake.ts';
import type { ProfileMistake } from '../rig/mistake.ts';
import { commandLoad } from '../rig/rules/rates.ts';
import type { FollowerJoint, FollowerProfile } from '../rig/schema/follower.ts';
import type { LeaderProfile } from '../rig/schema/leader.ts';
import { wireName } from '../rig/wire-choice.ts';

/** Where a command prints: a stream, or a test's list. */
interface Out {
  write(text: string): unknown;
}

/** What `check --json` prints, in the units of files. */
export interface CheckReport {
  readonly file: string;
  readonly mistakes: readonly ProfileMistake[];
  /** Null beside mistakes, and for a follower's file. */
  readonly leader: CheckedLeader | null;
  /** Empty beside mistakes, and for a leader's file. */
  readonly followers: readonly CheckedFollower[];
}

interface CheckedLeader {
  readonly leader: string;
  readonly port: string;
  readonly wire: string | null;
  readonly joints: readonly { readonly joint: string; readonly channel: number }[];
  readonly buttons: readonly { readonly button: string; readonly channel: number; readonly does: string }[];
}

interface CheckedFollower {
  readonly follower: string;
  readonly port: string;
  readonly wire: string | null;
  readonly rate_hz: number;
  readonly command_bytes: number;
  readonly baud: number | null;
  /** Share of the port's bits that its commands take, 0 to 1; null where the port has no baud rate. */
  readonly baud_share: number | null;
  readonly stop_category: 0 | 1 | 2;
  readonly wake: 'ask' | 'rest' | 'last';
  readonly joints: readonly CheckedJoint[];
}

interface CheckedJoint {
  readonly joint: string;
  readonly range_deg: readonly [number, number];
  readonly rest_deg: number;
  readonly speed_deg_s: number;
  readonly accel_deg_s2: number;
  /** Travel of a stop from full speed, which is also its lag behind a leader that moves so fast: v^2 / 2A. */
  readonly stopping_deg: number;
}

/** Reads a rig or profile file and says what is wrong with it, or what it will do. */
export function checkReport(file: string, readFile: ReadFile = readFromDisk): CheckReport {
  const loaded = loadProfile(file, readFile);
  if ('mistakes' in loaded) return { file, mistakes: loaded.mistakes, leader: null, followers: [] };
  const none = { file, mistakes: [], leader: null, followers: [] };
  switch (loaded.kind) {
    case 'leader':
      return { ...none, leader: checkedLeader(loaded.leader) };
    case 'follower':
      return { ...none, followers: [checkedFollower(loaded.follower)] };
    case 'rig': {
      const { leader, followers } = loaded.profiles;
      return { ...none, leader: checkedLeader(leader), followers: followers.map(checkedFollower) };
    }
  }
}

function checkedLeader({ leader, port, wire, joints, buttons }: LeaderProfile): CheckedLeader {
  return {
    leader,
    port,
    wire: wireName(wire),
    joints: joints.map(({ name, channel }) => ({ joint: name, channel })),
    buttons: buttons.map(({ name, channel, does }) => ({ button: name, channel, does })),
  };
}

function checkedFollower(profile: FollowerProfile): CheckedFollower {
  const { bytes = 0, baud = null, bitsPerS = 0 } = commandLoad(profile) ?? {};
  return {
    follower: profile.follower,
    port: profile.port,
    wire: wireName(profile.wire),
    rate_hz: profile.rate_hz,
    command_bytes: bytes,
    baud,
    baud_share: baud === null ? null : bitsPerS / baud,
    stop_category: profile.stop_category,
    wake: wakeOf(profile),
    joints: profile.joints.map(checkedJoint),
  };
}

function checkedJoint({ name, range_deg, rest_deg, speed_deg_s, accel_deg_s2 }: FollowerJoint): CheckedJoint {
  const stopping_deg = speed_deg_s ** 2 / (2 * accel_deg_s2);
  return { joint: name, range_deg, rest_deg, speed_deg_s, accel_deg_s2, stopping_deg };
}

const STOPS = ['power is removed at once', 'brakes, then power is removed', 'brakes, then holds'] as const;
const WAKES = {
  ask: 'waits for the go in the pose that is shown',
  rest: 'goes to its rest pose without asking',
  last: 'assumes its last pose without asking',
} as const;

/** The report as lines for people. */
function checkLines({ file, leader, followers }: CheckReport): readonly string[] {
  return [
    `${file}: no mistakes`,
    ...(leader === null ? [] : [leaderLine(leader)]),
    ...followers.flatMap((follower) => [followerLine(follower), ...follower.joints.map(jointLine)]),
  ];
}

function leaderLine({ leader, port, wire, joints, buttons }: CheckedLeader): string {
  const pressed = buttons.map(({ button, does }) => `, ${button} (${does})`).join('');
  return `leader ${leader}: ${wire} on ${port}; ${joints.map(({ joint }) => joint).join(', ')}${pressed}`;
}

function followerLine(checked: CheckedFollower): string {
  const { follower, wire, port, command_bytes, rate_hz, baud, baud_share, stop_category, wake } = checked;
  const taken = baud === null || baud_share === null ? '' : `, ${(baud_share * 100).toFixed(0)} % of ${baud} baud`;
  const commands = `${command_bytes} bytes ${rate_hz} times a second${taken}`;
  const stop = `stop category ${stop_category}: ${STOPS[stop_category]}`;
  return `follower ${follower}: ${wire} on ${port}; ${commands}; ${stop}; waking, it ${WAKES[wake]}`;
}

function jointLine({ joint, range_deg: [low, high], rest_deg, speed_deg_s, stopping_deg }: CheckedJoint): string {
  const stops = `stops within ${stopping_deg.toFixed(1)} deg`;
  return `  ${joint}: ${low} to ${high} deg, rest ${rest_deg} deg, at most ${speed_deg_s} deg/s, ${stops}`;
}

/** `eidograph check FILE` */
export function checkCommand(
  out: Out = process.stdout,
  err: Out = process.stderr,
  readFile: ReadFile = readFromDisk,
): CommandUnknownOpts {
  return new Command('check')
    .description('say every mistake in a rig or profile file, or what it will do')
    .argument('<file>', 'a rig, leader or follower file')
    .option('--json', 'print one JSON object')
    .action((file, { json }) => {
      const report = checkReport(file, readFile);
      const wrong = report.mistakes.length > 0;
      if (json === true) out.write(`${JSON.stringify(report, null, 2)}\n`);
      else if (wrong) err.write(`${report.mistakes.map(mistakeLine).join('\n')}\n`);
      else out.write(`${checkLines(report).join('\n')}\n`);
      process.exitCode = wrong ? 2 : 0;
    });
}
