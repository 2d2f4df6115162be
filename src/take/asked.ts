import type { Plan } from '../drive/plan.ts';
import type { Cast } from './cast.ts';
import { remapper } from './remapper.ts';
import type { Row, RowFollower } from './row.ts';

/** What a row asks of a follower of the rig: angles in its joint order, reused; null where it has no part. */
export type Asked = (row: Row, follower: number) => Float64Array | null;

/** By the take's poses through the present profiles, or by its recorded angles. */
export function askedOf(plan: Plan, cast: Cast, by: 'leader' | 'commands'): Asked {
  return by === 'leader' ? byRemap(plan, cast) : byCommand(cast);
}

function byRemap(plan: Plan, cast: Cast): (row: Row, f: number) => Float64Array {
  const maps = plan.followers.map((spec) => remapper(spec));
  const pose = new Float64Array(cast.leader.length);
  return (row, f) => {
    for (let j = 0; j < pose.length; j++) pose[j] = row.poseRad[cast.leader[j] as number] as number;
    return (maps[f] as ReturnType<typeof remapper>)(pose);
  };
}

function byCommand(cast: Cast): (row: Row, f: number) => Float64Array | null {
  const out = cast.followers.map((part) => new Float64Array(part?.joints.length ?? 0));
  return (row, f) => {
    const part = cast.followers[f] ?? null;
    if (part === null) return null;
    const arm = row.followers[part.follower] as RowFollower;
    const angles = out[f] as Float64Array;
    part.joints.forEach((joint, j) => {
      angles[j] = arm.angleRad[joint] as number;
    });
    return angles;
  };
}
