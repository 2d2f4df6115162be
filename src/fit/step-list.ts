import type { RigProfiles } from '../rig/compile.ts';
import { type Bench, type BenchServo, benchServos, type Outcome, type Step } from './bench.ts';
import type { Capture, CaptureStep } from './captures.ts';
import { deadbandStep } from './deadband-step.ts';
import { servoAlone } from './follower-part.ts';
import { hornStep, matchStep, servoWiringStep, travelStep } from './follower-steps.ts';
import { pointsStep, stillStep, sweepStep, wiringStep } from './leader-steps.ts';

type Mark = 'open' | 'done' | 'skipped';

/** A step as the session lists it. */
export interface ListedStep {
  readonly name: string;
  mark: Mark;
  run(): Step<Outcome>;
}

/** What an earlier session has found about the wiring stands in its captures. */
export function inputsOf({ leader }: RigProfiles, captured: readonly Capture[]): number[] {
  const channels = [...leader.joints, ...leader.buttons].map(({ channel }) => channel);
  return leader.joints.map(({ name }, joint) => {
    const told = captured.findLast(
      (c) => c.arm === leader.leader && c.joint === name && !Number.isNaN(c.channel) && c.step !== 'match',
    );
    const input = told === undefined ? -1 : channels.indexOf(told.channel);
    return input < 0 ? joint : input;
  });
}

/** Every step of a rig, in the order in which they are offered. */
export function stepsOf(bench: Bench): readonly ListedStep[] {
  const { leader, followers } = bench.profiles;
  const servos = benchServos(bench.profiles);
  const alone = servos.filter(({ follower, joint }) => {
    const profile = followers[follower];
    return profile !== undefined && servoAlone(profile, joint) !== null;
  });
  const has = (arm: string, joint: string | null, ...wanted: readonly CaptureStep[]): Mark =>
    bench.captures.some((c) => c.arm === arm && (joint === null || c.joint === joint) && wanted.includes(c.step))
      ? 'done'
      : 'open';
  const sourceOf = ({ follower, joint }: BenchServo): number => {
    const from = followers[follower]?.joints.find(({ name }) => name === joint)?.from;
    return leader.joints.findIndex(({ name }) => name === from);
  };
  return [
    ...servos.map((servo) => ({
      name: `horn of ${servo.arm} ${servo.joint}`,
      mark: has(servo.arm, servo.joint, 'servo-point', 'match'),
      run: () => hornStep(bench, servo),
    })),
    ...leader.joints.map(({ name }, joint) => ({
      name: `wiring of ${leader.leader} ${name}`,
      mark: has(leader.leader, name, 'leader-sweep', 'leader-point'),
      run: () => wiringStep(bench, joint),
    })),
    ...servos.map((servo) => ({
      name: `wiring of ${servo.arm} ${servo.joint}`,
      mark: has(servo.arm, servo.joint, 'servo-point', 'match'),
      run: () => servoWiringStep(bench, servo),
    })),
    { name: `${leader.leader} at rest`, mark: has(leader.leader, null, 'leader-still'), run: () => stillStep(bench) },
    ...leader.joints.map(({ name }, joint) => ({
      name: `sweep of ${leader.leader} ${name}`,
      mark: has(leader.leader, name, 'leader-sweep'),
      run: () => sweepStep(bench, joint),
    })),
    ...leader.joints.map(({ name }, joint) => ({
      name: `points of ${leader.leader} ${name}`,
      mark: has(leader.leader, name, 'leader-point'),
      run: () => pointsStep(bench, joint),
    })),
    ...alone.map((servo) => ({
      name: `travel of ${servo.arm} ${servo.joint}`,
      mark: has(servo.arm, servo.joint, 'servo-point'),
      run: () => travelStep(bench, servo),
    })),
    ...alone.map((servo) => ({
      name: `deadband of ${servo.arm} ${servo.joint}`,
      mark: has(servo.arm, servo.joint, 'servo-step'),
      run: () => deadbandStep(bench, servo),
    })),
    ...alone.flatMap((servo) => {
      const source = sourceOf(servo);
      if (source < 0) return [];
      return [
        {
          name: `match of ${servo.arm} ${servo.joint}`,
          mark: has(servo.arm, servo.joint, 'match'),
          run: () => matchStep(bench, servo, source),
        },
      ];
    }),
  ];
}
