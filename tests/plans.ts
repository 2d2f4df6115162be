import fc from 'fast-check';
import type { Plan } from '../src/drive/plan.ts';
import type { FollowerJointSpec, FollowerSpec, ServoSpec } from '../src/follower/spec.ts';
import type { ButtonSpec, LeaderJointSpec, LeaderSpec } from '../src/leader/spec.ts';
import { compileMap } from '../src/map/compile.ts';
import type { PointMap } from '../src/map/points.ts';

/** Plans built by hand, in radians and microseconds, for kernels and drives that never see a rig file. */

export const DEG = Math.PI / 180;
export const MS = 1_000;
export const S = 1_000_000;

/** A pot of 0.3 degrees a count, zero in the middle, whose points leave both rails out. */
const POT = named(
  'POT',
  compileMap(
    [
      [112, -120 * DEG],
      [912, 120 * DEG],
    ],
    'straight',
    'extend',
  ),
);

/** A servo of 180 degrees over 1880 us. */
const SERVO = named(
  'SERVO',
  compileMap(
    [
      [-90 * DEG, 560],
      [90 * DEG, 2440],
    ],
    'straight',
    'clamp',
  ),
);

/** A map is functions: a counterexample says its name instead of their text. */
function named(name: string, map: PointMap): PointMap {
  return Object.assign(map, { [fc.toStringMethod]: () => name });
}

/** What the pot of a joint made here reads at an angle; not whole, so that a test can ask for exactly that angle. */
export function countsAt(angleDeg: number): number {
  return POT.inverse(angleDeg * DEG);
}

export function leaderJoint(input: number, changes: Partial<LeaderJointSpec> = {}): LeaderJointSpec {
  return {
    name: `joint${input}`,
    input,
    map: POT,
    travelMin: 112,
    travelMax: 912,
    despike: 1,
    smooth: null,
    ...changes,
  };
}

/** A leader of `joints` plain joints on the first inputs; buttons come after them. */
export function leaderSpec(joints: number, changes: Partial<LeaderSpec> = {}): LeaderSpec {
  return {
    name: 'handstick',
    joints: Array.from({ length: joints }, (_, input) => leaderJoint(input)),
    buttons: [],
    timeoutUs: 250 * MS,
    countsMin: 0,
    countsMax: 1023,
    ...changes,
  };
}

/** A button that is pressed below 300 counts. */
export function button(input: number, does: ButtonSpec['does']): ButtonSpec {
  return { name: does, input, pressed: 'below', counts: 300, does };
}
export const PRESSED = 100;
export const RELEASED = 900;

/** A joint that copies leader joint `source` one to one, inside +-90 degrees at 60 deg/s and 240 deg/s^2. */
export function followerJoint(source: number | null, changes: Partial<FollowerJointSpec> = {}): FollowerJointSpec {
  return {
    name: `joint${source ?? 'free'}`,
    sources: source === null ? [] : [{ joint: source, weight: 1 }],
    gain: 1,
    offsetRad: 0,
    minRad: -90 * DEG,
    maxRad: 90 * DEG,
    deadbandRad: 0,
    speedRadS: 60 * DEG,
    accelRadS2: 240 * DEG,
    restRad: 0,
    ...changes,
  };
}

export function servoOf(joint: number, changes: Partial<ServoSpec> = {}): ServoSpec {
  return { channel: joint, turns: [{ joint, weight: 1 }], map: SERVO, deadbandUs: 4, ...changes };
}

/** An arm at 50 Hz that wakes at rest without asking, with one servo a joint. */
export function followerSpec(
  joints: readonly FollowerJointSpec[] = [followerJoint(0), followerJoint(1)],
  changes: Partial<FollowerSpec> = {},
): FollowerSpec {
  return {
    name: 'wren',
    periodUs: 20 * MS,
    joints,
    servos: joints.map((_, j) => servoOf(j)),
    joinShare: 0.25,
    joinMeet: 'move',
    wake: 'rest',
    stopCategory: 2,
    hasPower: false,
    onLostPulse: 'limp',
    poses: new Map(),
    ...changes,
  };
}

export function planOf(followers: readonly FollowerSpec[], changes: Partial<Plan> = {}): Plan {
  return { leader: leaderSpec(2), followers, unison: false, pace: 1, ...changes };
}
