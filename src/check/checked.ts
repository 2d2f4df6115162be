import type { Endings } from './endings.ts';
import type { FollowedJoint } from './followed.ts';
import type { FollowedTip } from './followed-tip.ts';
import type { CheckedLeader } from './leader.ts';
import type { JointLoad } from './load.ts';
import type { ArmMotion, JointMotion } from './motion.ts';
import type { Resolution, TipResolution } from './resolution.ts';
import type { Standing } from './standing.ts';
import type { Supply } from './supply.ts';

/** What a rig or profile will do, in the units of files. Null wherever the file gives no data. */
export interface Report {
  /** Null for a follower's file. */
  readonly leader: CheckedLeader | null;
  /** Empty for a leader's file. */
  readonly followers: readonly CheckedFollower[];
  /** What is over its limit, one sentence each. */
  readonly over: readonly string[];
  /** What an operator should know, one sentence each. */
  readonly warnings: readonly string[];
}

export interface CheckedFollower extends ArmMotion, FollowedTip, Standing, Supply, Endings {
  readonly follower: string;
  readonly port: string;
  readonly wire: string | null;
  readonly rate_hz: number;
  readonly command_bytes: number;
  readonly baud: number | null;
  /** Share of the port's bits that its commands take, 0 to 1; null where the port has no baud rate. */
  readonly baud_share: number | null;
  readonly wake: 'ask' | 'rest' | 'last';
  readonly follow: 'joints' | 'tip';
  readonly reach_mm: number | null;
  /** Reach for one of the leader's. */
  readonly scale: number | null;
  /** How much slower it has to move to move and load like the leader: the square root of the scale (Froude). */
  readonly time_factor: number | null;
  readonly joints: readonly CheckedJoint[];
}

export interface CheckedJoint extends FollowedJoint, JointMotion, Resolution, TipResolution, JointLoad {
  readonly joint: string;
  readonly range_deg: readonly [number, number];
  readonly rest_deg: number;
  readonly speed_deg_s: number;
  readonly accel_deg_s2: number;
}
