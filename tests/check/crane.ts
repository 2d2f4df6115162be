import { reportOf } from '../../src/check/report.ts';
import type { CheckedFollower, CheckedJoint, Report } from '../../src/check/checked.ts';
import { edited, RIG, rigIn, STORK } from '../rig/memory.ts';

/**
 * The stork of the rig tests with an arm: shoulder 100 mm above the floor, 300 mm and 200 mm of uniform links, 50 g at
 * the tip. Shoulder -60 to 85 degrees and elbow -50 to 5, right-handed about y: at 85 and 5 the forearm is level.
 */
const ARM = `arm:
  base: { height_mm: 100, mass_g: 2000, footprint_mm: [[100, 100], [-100, 100], [-100, -100], [100, -100]], friction: 0.5 }
  links:
    - { joint: shoulder, axis: y, to_mm: [0, 0, 300], mass_g: 200, motor: { stall_nm: 4, stall_a: 2 }, drag_nm: 0.1 }
    - { joint: elbow, axis: y, to_mm: [0, 0, 200], mass_g: 100, motor: { stall_nm: 1, stall_a: 1 } }
  payload: { mass_g: 50, at_mm: [0, 0, 0] }
supply: { volts: 6, amps: 5 }
on_lost_pulse: limp
`;

/** A leader of 250 mm reach, of two proportions other than the crane's. */
const LEADER_ARM = `  arm:
    links:
      - { joint: shoulder, axis: y, to_mm: [0, 0, 150] }
      - { joint: elbow, axis: y, to_mm: [0, 0, 100] }
`;

type Edit = readonly [string, string];

export const CRANE_RIG = edited(RIG, ['  buttons:', `${LEADER_ARM}  buttons:`]);
export const CRANE = edited(STORK, ['poses:', `${ARM}poses:`]);

export function craneReport(crane: readonly Edit[] = [], rig: readonly Edit[] = []): Report {
  return reportOf(rigIn({ 'rig.yaml': edited(CRANE_RIG, ...rig), 'stork.yaml': edited(CRANE, ...crane) }));
}

export function crane(edits: readonly Edit[] = [], rig: readonly Edit[] = []): CheckedFollower {
  const [follower] = craneReport(edits, rig).followers;
  if (follower === undefined) throw new Error('no follower was checked');
  return follower;
}

export function joint(name: string, edits: readonly Edit[] = [], rig: readonly Edit[] = []): CheckedJoint {
  const found = crane(edits, rig).joints.find((one) => one.joint === name);
  if (found === undefined) throw new Error(`no joint ${name}`);
  return found;
}
