import { compileMap, type Curve } from '../map/compile.ts';
import { rising } from '../rig/compile-leader.ts';

type Points = readonly (readonly [number, number])[];

/** Maps of profiles as plain functions, in the units of files, going on beyond their outer points. */

export function curveThrough(points: Points, curve: Curve): (x: number) => number {
  const map = compileMap(points, curve, 'extend');
  return (x) => map.value(x);
}

/** Counts to degrees, as the profile of a leader has it. */
export function leaderCurve(joint: { readonly points: Points; readonly curve: Curve }): (counts: number) => number {
  return curveThrough(rising(joint.points), joint.curve);
}

/** Microseconds to degrees, from the degrees and microseconds of a servo's points. */
export function servoCurve(points: Points): (pulseUs: number) => number {
  return curveThrough(rising(points.map(([deg, us]) => [us, deg] as const)), 'straight');
}
