import type { BoardStatus, LiveStatus } from '../../../src/bridge/live.ts';
import type { Line } from '../../../src/cli/view/layout.ts';
import type { Scene } from '../../../src/cli/view/scene.ts';
import type { FollowerStatus, LeaderStatus } from '../../../src/drive/status.ts';

/** Statuses and scenes as tests need them: everything in order, but for what is said. */

const NAMES = ['wren', 'heron', 'stork'] as const;
export const JOINTS = ['base', 'shoulder', 'elbow', 'nod', 'twist', 'grip'] as const;

export function leaderStatus(changes: Partial<LeaderStatus> = {}): LeaderStatus {
  return {
    leader: 'handstick',
    stale: false,
    reading_age_us: 5_000,
    enabled: true,
    supply_ratio: 1,
    joints: JOINTS.map((joint, j) => ({
      joint,
      counts: 2048 + j,
      angle_deg: 10 * j,
      health: 'sound' as const,
      frozen: false,
    })),
    buttons: [{ button: 'pedal', does: 'hold', pressed: false }],
    ...changes,
  };
}

export function followerStatus(changes: Partial<FollowerStatus> = {}): FollowerStatus {
  return {
    follower: 'wren',
    state: 'following',
    blocked_by: [],
    going: true,
    clutched: false,
    moving: true,
    commands: 100,
    lag_us: 2_500,
    busy_us: null,
    joints: JOINTS.map((joint, j) => ({
      joint,
      wanted_deg: 5 * j,
      target_deg: 5 * j,
      angle_deg: 5 * j,
      range_deg: [-80, 80] as const,
      load_share: null,
      warmth: null,
      limited_by: [],
    })),
    ...changes,
  };
}

export function boardStatus(changes: Partial<BoardStatus> = {}): BoardStatus {
  return {
    port: 'serial:/dev/ttyACM0',
    followers: [],
    leads: false,
    open: true,
    ready: true,
    board: null,
    fault: null,
    readings: 0,
    commands: 0,
    garbled: 0,
    lost: 0,
    reboots: 0,
    ...changes,
  };
}

export function liveStatus(changes: Partial<LiveStatus> = {}): LiveStatus {
  const followers = changes.followers ?? NAMES.map((follower) => followerStatus({ follower }));
  return {
    t_us: 1_000_000,
    pace: 1,
    unison: false,
    leader: leaderStatus(),
    boards: [
      boardStatus({ leads: true }),
      ...followers.map(({ follower }, f) => boardStatus({ port: `serial:/dev/ttyACM${f + 1}`, followers: [follower] })),
    ],
    ...changes,
    followers,
  };
}

export function scene(changes: Partial<Scene> = {}): Scene {
  const status = changes.status ?? liveStatus();
  return {
    rig: 'lantern-yard',
    dry: false,
    nowUs: 1_000_000,
    perSecond: status.followers.map(() => 50),
    along: '',
    wakesAt: status.followers.map(() => 'rest'),
    selected: status.followers.map(() => true),
    messages: [],
    cautions: false,
    prompt: null,
    help: false,
    ...changes,
    status,
  };
}

export function textOf(line: Line): string {
  return line.map(({ text }) => text).join('');
}

/** The picture as it would be read, right-hand blanks left out. */
export function pictureOf(lines: readonly Line[]): string {
  return lines.map((line) => textOf(line).trimEnd()).join('\n');
}
