import { GRAVITY_MS2, pointMasses } from './bodies.ts';
import { besideM, length } from './extent.ts';
import { passive } from './passive.ts';
import type { ArmSpec, LinkSpec } from './spec.ts';

/** How quickly the static torque of each joint can change, at whatever pose; one value a joint of the profile. */
export interface LoadBounds {
  /** Newton metres for a radian, however that is shared among the joints. */
  readonly slopeNm: Float64Array;
  /** Newton metres for a radian squared: along a way on which all joints together turn at W, |torque''| <= bend (3/2 W^2 + W'). */
  readonly bendNm: Float64Array;
}

/** What springs and cables do is looked at all round, at every half degree, and allowed a tenth more. */
const LOOKS = 720;
const BETWEEN = 1.1;

/**
 * Turning any joint turns a weight's lever, or the axis, or both: the torque changes by the weight times its longest
 * lever for a radian, and by the same for a radian squared.
 * @param joints how many the profile has
 */
export function loadBounds(spec: ArmSpec, joints: number): LoadBounds {
  const slopeNm = new Float64Array(joints);
  const bendNm = new Float64Array(joints);
  const masses = pointMasses(spec);
  spec.links.forEach((link, i) => {
    let weightNm = 0;
    for (const { link: on, massKg, atM } of masses) {
      if (on < i) continue;
      let lever = on === i ? besideM(link.axis, atM) : besideM(link.axis, link.toM) + length(atM);
      for (let k = i + 1; k < on; k++) lever += length((spec.links[k] as LinkSpec).toM);
      weightNm += GRAVITY_MS2 * massKg * lever;
    }
    const { slope, bend } = pullBounds(spec, i);
    slopeNm[link.joint] = weightNm + slope;
    bendNm[link.joint] = weightNm + bend;
  });
  return { slopeNm, bendNm };
}

function pullBounds(spec: ArmSpec, i: number): { slope: number; bend: number } {
  const link = spec.links[i] as LinkSpec;
  if (link.spring === null && link.cable === null) return { slope: 0, bend: 0 };
  const pulls = passive(spec);
  const turn = (2 * Math.PI) / LOOKS;
  const pose = new Float64Array(Math.max(...spec.links.map(({ joint }) => joint)) + 1);
  const torque = Float64Array.from({ length: LOOKS + 2 }, (_, k) => {
    const out = new Float64Array(spec.links.length);
    pose[link.joint] = k * turn - Math.PI;
    pulls.addHeld(pose, out);
    return out[i] as number;
  });
  let slope = 0;
  let bend = 0;
  for (let k = 1; k <= LOOKS; k++) {
    const [before, at, after] = torque.subarray(k - 1, k + 2) as unknown as readonly [number, number, number];
    slope = Math.max(slope, Math.abs(after - at) / turn);
    bend = Math.max(bend, Math.abs(after - 2 * at + before) / (turn * turn));
  }
  return { slope: BETWEEN * slope, bend: BETWEEN * bend };
}
