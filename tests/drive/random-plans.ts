import fc from 'fast-check';
import type { Start } from '../../src/drive/follower-stage.ts';
import type { Plan } from '../../src/drive/plan.ts';
import type { FollowerJointSpec, FollowerSpec, ServoSpec } from '../../src/follower/spec.ts';
import type { LeaderSpec } from '../../src/leader/spec.ts';
import { button, DEG, followerJoint, followerSpec, leaderJoint, leaderSpec, MS, S, servoOf } from '../plans.ts';

/** Random plans, as a rig's checks would let them pass. */

const between = (min: number, max: number): fc.Arbitrary<number> => fc.double({ min, max, noNaN: true });

const smooth = fc.option(
  fc.record({ cutoffHz: between(0.5, 5), betaHzPerRadS: between(0, 10), slopeCutoffHz: between(0.5, 3) }),
  { nil: null },
);

/** `join` is left out: it is a key that the laws could not see. */
const duties = fc.subarray(['enable', 'hold', 'clutch', 'stop'] as const);

const randomLeader: fc.Arbitrary<LeaderSpec> = fc
  .record({
    joints: fc.array(fc.record({ despike: fc.constantFrom(1, 3, 5), smooth }), { minLength: 1, maxLength: 3 }),
    duties,
    timeoutUs: fc.constantFrom(100 * MS, 250 * MS, S, Infinity),
  })
  .map(({ joints, duties: does, timeoutUs }) =>
    leaderSpec(joints.length, {
      joints: joints.map((changes, j) => leaderJoint(j, changes)),
      buttons: does.map((duty, b) => button(joints.length + b, duty)),
      timeoutUs,
    }),
  );

function randomJoint(leaderJoints: number): fc.Arbitrary<FollowerJointSpec> {
  const source = fc.record({ joint: fc.nat(leaderJoints - 1), weight: fc.constantFrom(1, 0.5, -0.5) });
  return fc
    .record({
      sources: fc.uniqueArray(source, { maxLength: 2, selector: (s) => s.joint }),
      gain: fc.oneof(between(0.2, 2), between(-2, -0.2)),
      offsetRad: between(-30 * DEG, 30 * DEG),
      minRad: between(-90 * DEG, -5 * DEG),
      maxRad: between(5 * DEG, 90 * DEG),
      deadbandRad: fc.oneof(fc.constant(0), between(0, 3 * DEG)),
      speedRadS: between(5 * DEG, 400 * DEG),
      accelRadS2: between(20 * DEG, 4000 * DEG),
      rest: between(0, 1),
    })
    .map(({ rest, ...joint }) =>
      followerJoint(0, { ...joint, restRad: joint.minRad + rest * (joint.maxRad - joint.minRad) }),
    );
}

function randomServos(joints: number): fc.Arbitrary<ServoSpec[]> {
  return fc.boolean().map((coupled) => {
    const servos = Array.from({ length: joints }, (_, j) => servoOf(j));
    if (!coupled || joints < 2) return servos;
    // A parallelogram: the second servo turns with the first joint, too.
    const turns = [
      { joint: 0, weight: 1 },
      { joint: 1, weight: 1 },
    ];
    return servos.map((servo, j) => (j === 1 ? { ...servo, turns } : servo));
  });
}

function randomFollower(leaderJoints: number): fc.Arbitrary<FollowerSpec> {
  return fc
    .array(randomJoint(leaderJoints), { minLength: 1, maxLength: 3 })
    .chain((joints) =>
      fc.record({
        joints: fc.constant(joints),
        servos: randomServos(joints.length),
        periodUs: fc.constantFrom(3 * MS, 10 * MS, 20 * MS, 20 * MS, 50 * MS),
        joinShare: between(0.1, 1),
        joinMeet: fc.constantFrom('move', 'move', 'wait'),
        wake: fc.constantFrom('ask', 'rest', 'last'),
        stopCategory: fc.constantFrom(0, 1, 2),
      }),
    )
    .map(({ joints, ...changes }) => followerSpec(joints, { ...changes, hasPower: changes.stopCategory !== 2 }));
}

export interface Staging {
  readonly plan: Plan;
  readonly starts: readonly Start[];
  /** How long a board is busy with one command. */
  readonly busyUs: number;
}

export const randomStaging: fc.Arbitrary<Staging> = randomLeader.chain((leader) =>
  fc
    .array(
      fc.record({
        spec: randomFollower(leader.joints.length),
        unasked: fc.boolean(),
        /** Hangs on the board of the one before it. */
        shares: fc.boolean(),
        poseRad: fc.option(fc.array(between(-2, 2), { minLength: 3, maxLength: 3 }), { nil: null }),
      }),
      { minLength: 1, maxLength: 3 },
    )
    .chain((followers) =>
      fc.record({
        plan: fc.record({
          leader: fc.constant(leader),
          followers: fc.constant(followers.map(({ spec }, f) => ({ ...spec, name: `follower${f}` }))),
          unison: fc.boolean(),
          pace: fc.constantFrom(1, 1, 0.5, 0.1),
        }),
        /** All or none: in a trace arms start awake, in a live run they do not. */
        starts: fc.boolean().map((awake) => startsOf(followers, awake)),
        busyUs: fc.constantFrom(0, 0, MS, 12 * MS, 30 * MS),
      }),
    ),
);

function startsOf(
  followers: readonly { spec: FollowerSpec; unasked: boolean; shares: boolean; poseRad: number[] | null }[],
  awake: boolean,
): Start[] {
  let board = -1;
  return followers.map(({ spec, unasked, shares, poseRad }, f) => {
    if (f === 0 || !shares) board++;
    const pose = poseRad === null ? null : Float64Array.from(spec.joints, (_, j) => poseRad[j] as number);
    return { poseRad: pose, unasked, awake, board };
  });
}
