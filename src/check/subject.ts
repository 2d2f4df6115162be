import type { ArmSpec } from '../arm/spec.ts';
import type { FollowerSpec } from '../follower/spec.ts';
import type { LeaderSpec } from '../leader/spec.ts';
import { compileArm } from '../rig/compile-arm.ts';
import { compileFollower } from '../rig/compile-follower.ts';
import { compileLeader } from '../rig/compile-leader.ts';
import type { LoadedRig } from '../rig/load.ts';
import type { FollowerProfile } from '../rig/schema/follower.ts';
import type { LeaderProfile } from '../rig/schema/leader.ts';

/** A leader that is looked at: what its file says, and what was compiled of it. */
export interface LeaderSubject {
  readonly profile: LeaderProfile;
  readonly spec: LeaderSpec;
  /** Null where its file gives no geometry. */
  readonly arm: ArmSpec | null;
}

/** A follower that is looked at. */
export interface FollowerSubject {
  readonly profile: FollowerProfile;
  readonly spec: FollowerSpec;
  /** Null for a profile that is looked at alone. */
  readonly leader: LeaderSubject | null;
}

export function leaderSubject(profile: LeaderProfile): LeaderSubject {
  const { arm, joints } = profile;
  return { profile, spec: compileLeader(profile), arm: arm === undefined ? null : compileArm(arm, joints) };
}

export function rigSubjects({ rig, profiles }: LoadedRig): readonly FollowerSubject[] {
  const leader = leaderSubject(profiles.leader);
  return profiles.followers.flatMap((profile, i) => {
    const spec = rig.plan.followers[i];
    return spec === undefined ? [] : [{ profile, spec, leader }];
  });
}

/** Alone, a follower copies nobody: what it copies is compiled away, and all else stays as it is. */
export function followerAlone(profile: FollowerProfile): FollowerSubject {
  const joints = profile.joints.map((joint) => ({ ...joint, from: undefined, stretch: false }));
  const spec = compileFollower({ ...profile, joints, follow: 'joints' }, NOBODY, null);
  return { profile, spec, leader: null };
}

const NOBODY: LeaderSpec = { name: '', joints: [], buttons: [], timeoutUs: 0, countsMin: 0, countsMax: 0 };
