import { chain } from './chain.ts';
import { reachM } from './extent.ts';
import type { ArmSpec } from './spec.ts';
import { spread } from './spread.ts';

/** Lowest and highest angle of a joint. */
export interface JointRange {
  readonly minRad: number;
  readonly maxRad: number;
}

/** Poses looked at. One generic pose would do; a few more cost nothing and allow for narrow ranges. */
const POSES = 16;
/** A joint that moves the tip by less than this share of the reach a radian does not move it. */
const NOTHING = 1e-9;

/** Joints, by index, that can move the tip: those with a link, unless their axis runs through the tip in every pose. */
export function reaching(arm: ArmSpec, joints: readonly JointRange[]): readonly number[] {
  const poser = chain(arm);
  const pose = new Float64Array(joints.length);
  const jacobian = new Float64Array(3 * poser.links);
  const most = new Float64Array(poser.links);
  const places = spread(joints.length);
  for (let look = 1; look <= POSES; look++) {
    for (const [j, { minRad, maxRad }] of joints.entries()) {
      pose[j] = minRad + places.at(look, j) * (maxRad - minRad);
    }
    poser.pose(pose);
    poser.jacobian(poser.at, 3 * poser.links, poser.links - 1, jacobian);
    for (let i = 0; i < poser.links; i++) {
      most[i] = Math.max(most[i] as number, Math.hypot(...jacobian.subarray(3 * i, 3 * i + 3)));
    }
  }
  const least = NOTHING * reachM(arm);
  return arm.links.flatMap(({ joint }, i) => ((most[i] as number) > least ? [joint] : []));
}
