import type { Burden } from '../follower/burden.ts';
import { BLOCKS, LIMITS } from '../follower/reasons.ts';
import type { State } from '../follower/states.ts';
import { ILLS, type Ill } from '../leader/health.ts';
import type { Drive } from './drive.ts';
import type { FollowerStage } from './follower-stage.ts';
import type { Shared } from './shared.ts';

/** Everything people and programs are shown of a drive; pulled, never pushed. Keys are the ones `--json` prints. */
export interface DriveStatus {
  readonly t_us: number;
  readonly pace: number;
  readonly unison: boolean;
  readonly leader: LeaderStatus;
  readonly followers: readonly FollowerStatus[];
}

export interface LeaderStatus {
  readonly leader: string;
  /** Readings are too old to start a motion. */
  readonly stale: boolean;
  readonly reading_age_us: number | null;
  readonly enabled: boolean;
  /** How far the pots' supply has sagged or risen since the start; 1 when it has not. */
  readonly supply_ratio: number;
  readonly joints: readonly {
    readonly joint: string;
    readonly counts: number | null;
    readonly angle_deg: number | null;
    readonly health: Ill;
    readonly frozen: boolean;
  }[];
  readonly buttons: readonly { readonly button: string; readonly does: string; readonly pressed: boolean }[];
}

export interface FollowerStatus {
  readonly follower: string;
  readonly state: State;
  /** Why it does not follow, of `BLOCKS`. */
  readonly blocked_by: readonly (keyof typeof BLOCKS)[];
  /** In `waking`: false until the operator's go. */
  readonly going: boolean;
  readonly clutched: boolean;
  readonly moving: boolean;
  readonly commands: number;
  /** Age of the newest reading when the last command was made: lag of the bridge itself. */
  readonly lag_us: number | null;
  /** How long its port has been busy with the last command; null: it is not. */
  readonly busy_us: number | null;
  readonly joints: readonly {
    readonly joint: string;
    readonly wanted_deg: number;
    readonly target_deg: number;
    readonly angle_deg: number;
    readonly range_deg: readonly [number, number];
    /** Torque against what its motor may give; null where the file knows no motor. */
    readonly load_share: number | null;
    /** Slow estimate of the motor's warmth, 0 to 1; null where the file knows no motor. */
    readonly warmth: number | null;
    /** What holds it back, of `LIMITS`. */
    readonly limited_by: readonly (keyof typeof LIMITS)[];
  }[];
}

const DEG = 180 / Math.PI;

/** @param nowUs the clock now: later than the last event, if nothing has happened since */
export function driveStatus(drive: Drive, nowUs: number): DriveStatus {
  return {
    t_us: nowUs,
    pace: drive.common.pace[0] as number,
    unison: drive.plan.unison,
    leader: leaderStatus(drive, nowUs),
    followers: drive.followers.map((follower) => followerStatus(follower, drive.common, nowUs)),
  };
}

function leaderStatus(drive: Drive, nowUs: number): LeaderStatus {
  const { kernel, stale, enabled, lastUs } = drive.leader;
  return {
    leader: kernel.spec.name,
    stale,
    reading_age_us: finite(nowUs - lastUs),
    enabled,
    supply_ratio: kernel.notices.supplyRatio[0] as number,
    joints: kernel.spec.joints.map((joint, j) => ({
      joint: joint.name,
      counts: finite(kernel.countsNow[j] as number),
      angle_deg: finite((kernel.poseRad[j] as number) * DEG),
      health: ILLS[kernel.health.state[j] as number] as Ill,
      frozen: kernel.notices.frozen[j] === 1,
    })),
    buttons: kernel.spec.buttons.map((button, b) => ({
      button: button.name,
      does: button.does,
      pressed: kernel.buttons.down[b] === 1,
    })),
  };
}

function followerStatus(stage: FollowerStage, common: Shared, nowUs: number): FollowerStatus {
  const { is, arm, spec, board } = stage;
  return {
    follower: spec.name,
    state: is.state,
    blocked_by: named(BLOCKS, is.blocks),
    going: is.going,
    clutched: is.clutched,
    moving: is.moving,
    commands: stage.commands,
    lag_us: finite(stage.readingAgeUs),
    busy_us: common.busy[board] === 1 ? nowUs - (common.busySinceUs[board] as number) : null,
    joints: spec.joints.map((joint, j) => ({
      joint: joint.name,
      wanted_deg: (arm.wantedRad[j] as number) * DEG,
      target_deg: (arm.targetRad[j] as number) * DEG,
      angle_deg: (arm.governor.x[j] as number) * DEG,
      range_deg: [joint.minRad * DEG, joint.maxRad * DEG] as const,
      ...carried(arm.burden, j),
      limited_by: named(LIMITS, arm.limits[j] as number),
    })),
  };
}

function carried(burden: Burden | null, j: number): { load_share: number | null; warmth: number | null } {
  const share = finite(burden?.shares[j] ?? Number.NaN);
  return { load_share: share, warmth: share === null ? null : (burden?.warmth[j] ?? null) };
}

function named<T extends string>(bits: Readonly<Record<T, number>>, value: number): T[] {
  return (Object.keys(bits) as T[]).filter((name) => (value & bits[name]) !== 0);
}

function finite(value: number): number | null {
  return Number.isFinite(value) ? value : null;
}
