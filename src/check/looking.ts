import { chain } from '../arm/chain.ts';
import { keepOuts } from '../arm/keep-outs.ts';
import { worst } from '../arm/worst.ts';
import type { Worst } from '../arm/worst.ts';
import type { FollowerJointSpec, WholeArmSpec } from '../follower/spec.ts';

/** Finds where over an arm's ranges something is greatest. Poses inside a keep-out do not count: the arm never gets there. */
export type Look = (score: (anglesRad: Float64Array) => number) => Worst;

export function looking(whole: WholeArmSpec, joints: readonly FollowerJointSpec[]): Look {
  const places = keepOuts(whole.keepOut);
  const poser = chain(whole.arm);
  const clear = new Float64Array(1);
  const ranges = {
    minRad: joints.map(({ minRad }) => minRad),
    maxRad: joints.map(({ maxRad }) => maxRad),
    joints: whole.arm.links.map(({ joint }) => joint),
  };
  const rest = Float64Array.from(joints, ({ restRad }) => restRad);
  const allowed = (anglesRad: Float64Array): boolean => {
    if (!places.some) return true;
    poser.pose(anglesRad);
    places.clearance(poser, clear);
    return (clear[0] as number) >= 0;
  };
  return (score) => {
    const scored = (anglesRad: Float64Array): number => (allowed(anglesRad) ? score(anglesRad) : Number.NaN);
    const found = worst(ranges, scored);
    // Where keep-outs leave little room, the search may meet no pose outside them; at rest the arm is outside.
    const resting = { value: scored(rest), poseRad: rest };
    return readable(resting.value > found.value ? resting : found, scored, joints);
  };
}

/** A pose for people: joints that do not matter stand at rest in it, not where the search happened to leave them. */
function readable(
  { value, poseRad }: Worst,
  score: (anglesRad: Float64Array) => number,
  joints: readonly FollowerJointSpec[],
): Worst {
  const pose = Float64Array.from(poseRad);
  for (const [j, { restRad }] of joints.entries()) {
    const found = pose[j] as number;
    pose[j] = restRad;
    if (!(score(pose) >= value - NOTHING * Math.max(1, Math.abs(value)))) pose[j] = found;
  }
  return { value, poseRad: pose };
}

/** What no figure shows, of a value or of one. */
const NOTHING = 1e-6;
