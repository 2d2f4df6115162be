import type { RigProfiles } from '../rig/compile.ts';
import { type Bench, type BenchServo, benchServos, type Outcome, prompt, type Step } from './bench.ts';
import type { Capture, CaptureStep } from './captures.ts';
import { servoAlone } from './follower-part.ts';
import { deadbandStep } from './deadband-step.ts';
import { hornStep, matchStep, servoWiringStep, travelStep } from './follower-steps.ts';
import { pointsStep, stillStep, sweepStep, wiringStep } from './leader-steps.ts';
import { sendHome } from './motion.ts';
import type { Prompt, SessionEffect, SessionEvent } from './prompt.ts';

/**
 * A measuring session as a plain state machine: events in, prompts and effects out. It knows no port, file, clock or
 * screen. Every step can be done anew, skipped, or left; what is captured is handed out at once to be kept, and a session
 * that is given those captures again goes on where the former one ended.
 */
export interface Session {
  /** What the operator is asked or told now. */
  readonly prompt: Prompt;
  readonly over: boolean;
  take(event: SessionEvent): void;
  /** What is new to be read, in order; each line is handed out once. */
  said(): readonly string[];
  /** What is to be done, in order; each is handed out once. */
  effects(): readonly SessionEffect[];
}

type Mark = 'open' | 'done' | 'skipped';

interface ListedStep {
  readonly name: string;
  mark: Mark;
  run(): Step<Outcome>;
}

/** Words that are heard at every prompt. */
const HELP = [
  'At any question: list leaves the step and shows all steps, redo begins it anew, skip marks it skipped,',
  'quit leaves the session. What was captured is kept, and the next session goes on from there.',
];

export function session(profiles: RigProfiles, captured: readonly Capture[]): Session {
  const bench: Bench = {
    profiles,
    captures: [...captured],
    effects: [],
    awake: new Set(),
    cleared: new Set(),
    inputOf: inputsOf(profiles, captured),
    away: null,
  };
  const steps = stepsOf(bench);
  let at: ListedStep | null = null;
  let running: Step<Outcome> | null = null;
  let over = false;

  const list = (lines: readonly string[]): Prompt => {
    const width = Math.max(...steps.map(({ name }) => name.length));
    const rows = steps.map(({ name, mark }, i) => `${String(i + 1).padStart(3)}  ${name.padEnd(width)}  ${mark}`);
    const next = steps.findIndex(({ mark }) => mark === 'open');
    const enter = next < 0 ? 'Enter: fit' : `Enter: step ${next + 1}`;
    return prompt(
      [...lines, '', ...rows, ''],
      `${enter}; a number: that step; fit: fit and write; quit: leave (?: help): `,
    );
  };
  const unsaid: string[] = [];
  let shown = prompt([]);
  const show = (next: Prompt): void => {
    shown = next;
    unsaid.push(...next.lines);
  };
  const opening = list([
    ...(captured.length > 0 ? [`${captured.length} captures of an earlier session are taken up.`] : []),
    ...HELP,
  ]);

  show(opening);

  const begin = (step: ListedStep): void => {
    at = step;
    running = step.run();
    proceed(running.next());
  };
  const proceed = (result: IteratorResult<Prompt, Outcome>): void => {
    if (result.done !== true) {
      show(result.value);
      return;
    }
    if (at !== null && result.value.done) at.mark = 'done';
    leave(result.value.lines);
  };
  const leave = (lines: readonly string[]): void => {
    running?.return({ done: false, lines: [] });
    sendHome(bench);
    running = null;
    at = null;
    show(list(lines));
  };
  const end = (fit: boolean): void => {
    leave([]);
    over = true;
    bench.effects.push({ kind: 'end', fit });
    show(prompt([]));
  };

  const choose = (text: string): void => {
    const next = steps.find(({ mark }) => mark === 'open');
    const chosen = text === '' ? next : steps[Number(text) - 1];
    if (text === 'fit' || (text === '' && next === undefined)) end(true);
    else if (chosen !== undefined) begin(chosen);
    else show(prompt([`There is no step ${text}.`], shown.ask));
  };

  const line = (text: string): void => {
    switch (text) {
      case 'quit':
        end(false);
        return;
      case '?':
        show({ ...shown, lines: HELP });
        return;
      case 'list':
        leave([]);
        return;
      case 'skip':
        if (at !== null) at.mark = 'skipped';
        leave(at === null ? ['There is no step to skip: choose one.'] : []);
        return;
      case 'redo': {
        const again = at;
        leave(again === null ? ['Choose the step to do anew by its number.'] : []);
        if (again !== null) begin(again);
        return;
      }
      default:
        if (running === null) choose(text);
        else proceed(running.next({ kind: 'line', text }));
    }
  };

  return {
    get prompt() {
      return shown;
    },
    get over() {
      return over;
    },
    take(event) {
      if (over) return;
      switch (event.kind) {
        case 'line':
          line(event.text.trim());
          return;
        case 'awake':
          bench.awake.add(event.follower);
          break;
        case 'asleep':
          bench.awake.delete(event.follower);
          // Its servos have lost their places: whoever goes on has to clear the arm again.
          bench.cleared.delete(event.follower);
          if (bench.away?.follower === event.follower) {
            bench.away = null;
            leave([`${event.why} The step was left; do it again when the arm is back.`]);
          }
          return;
        case 'jogged':
          if (event.home) bench.away = null;
          break;
        case 'reading':
          break;
      }
      if (running !== null) proceed(running.next(event));
    },
    said: () => unsaid.splice(0),
    effects: () => bench.effects.splice(0),
  };
}

/** What an earlier session has found about the wiring stands in its captures. */
function inputsOf({ leader }: RigProfiles, captured: readonly Capture[]): number[] {
  const channels = [...leader.joints, ...leader.buttons].map(({ channel }) => channel);
  return leader.joints.map(({ name }, joint) => {
    const told = captured.findLast(
      (c) => c.arm === leader.leader && c.joint === name && !Number.isNaN(c.channel) && c.step !== 'match',
    );
    const input = told === undefined ? -1 : channels.indexOf(told.channel);
    return input < 0 ? joint : input;
  });
}

function stepsOf(bench: Bench): readonly ListedStep[] {
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
