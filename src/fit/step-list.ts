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
  /** `sweep of handstick`, for one joint each. */
  readonly kind: string;
  /** Of the joint, or what else is measured. */
  readonly label: string;
  /** It cannot go on without the leader's readings. */
  readonly listens: boolean;
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
  // A joint that two servos turn has two horns.
  const labelOf = ({ follower, joint, channel }: BenchServo): string =>
    servos.filter((other) => other.follower === follower && other.joint === joint).length > 1
      ? `${joint} (channel ${channel})`
      : joint;
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
      kind: `horn of ${servo.arm}`,
      label: labelOf(servo),
      mark: has(servo.arm, servo.joint, 'servo-point', 'match'),
      listens: false,
      run: () => hornStep(bench, servo),
    })),
    ...leader.joints.map(({ name }, joint) => ({
      kind: `wiring of ${leader.leader}`,
      label: name,
      mark: has(leader.leader, name, 'leader-sweep', 'leader-point'),
      listens: true,
      run: () => wiringStep(bench, joint),
    })),
    ...servos.map((servo) => ({
      kind: `wiring of ${servo.arm}`,
      label: labelOf(servo),
      mark: has(servo.arm, servo.joint, 'servo-point', 'match'),
      listens: false,
      run: () => servoWiringStep(bench, servo),
    })),
    {
      kind: `rest of ${leader.leader}`,
      label: 'all joints',
      mark: has(leader.leader, null, 'leader-still'),
      listens: true,
      run: () => stillStep(bench),
    },
    ...leader.joints.map(({ name }, joint) => ({
      kind: `sweep of ${leader.leader}`,
      label: name,
      mark: has(leader.leader, name, 'leader-sweep'),
      listens: true,
      run: () => sweepStep(bench, joint),
    })),
    ...leader.joints.map(({ name }, joint) => ({
      kind: `points of ${leader.leader}`,
      label: name,
      mark: has(leader.leader, name, 'leader-point'),
      listens: true,
      run: () => pointsStep(bench, joint),
    })),
    ...alone.map((servo) => ({
      kind: `travel of ${servo.arm}`,
      label: servo.joint,
      mark: has(servo.arm, servo.joint, 'servo-point'),
      listens: false,
      run: () => travelStep(bench, servo),
    })),
    ...alone.map((servo) => ({
      kind: `deadband of ${servo.arm}`,
      label: servo.joint,
      mark: has(servo.arm, servo.joint, 'servo-step'),
      listens: false,
      run: () => deadbandStep(bench, servo),
    })),
    ...alone.flatMap((servo) => {
      const source = sourceOf(servo);
      if (source < 0) return [];
      return [
        {
          kind: `match of ${servo.arm}`,
          label: servo.joint,
          mark: has(servo.arm, servo.joint, 'match'),
          listens: true,
          run: () => matchStep(bench, servo, source),
        },
      ];
    }),
  ];
}

/** A line of the list is no longer, unless one name is. */
const LINE_CHARACTERS = 78;
const SIGN: Readonly<Record<Mark, string>> = { open: ' ', done: '+', skipped: '-' };

/** All steps, numbered, a line or more for each kind: `sweep of stick   +8 base   9 elbow`. */
export function listed(steps: readonly ListedStep[]): readonly string[] {
  const width = Math.max(...steps.map(({ kind }) => kind.length));
  const lines: string[] = [];
  let kindBefore = '';
  for (const [i, { kind, label, mark }] of steps.entries()) {
    const entry = `  ${SIGN[mark]}${i + 1} ${label}`;
    const last = lines.at(-1) ?? '';
    if (kind === kindBefore && last.length + entry.length <= LINE_CHARACTERS) lines[lines.length - 1] = last + entry;
    else lines.push((kind === kindBefore ? '' : kind).padEnd(width) + entry);
    kindBefore = kind;
  }
  return lines;
}

export const LEGEND = '+ is done, - is skipped';

export function nameOf({ kind, label }: ListedStep): string {
  return `${kind} ${label}`;
}
