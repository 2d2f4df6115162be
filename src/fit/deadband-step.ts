import {
  answer,
  type Bench,
  type BenchServo,
  done,
  keep,
  nextAttempt,
  type Outcome,
  prompt,
  type Step,
  undone,
} from './bench.ts';
import { emptyCapture } from './captures.ts';
import { home, jogTo } from './motion.ts';
import type { Prompt } from './prompt.ts';
import { servoFound } from './servo-found.ts';

/** Onward from where it last moved, in microseconds: finely first, because most deadbands are of a few. */
const FINE_STEPS_US = [1, 2, 3, 4, 5, 6, 7, 8, 10, 12, 14, 17, 20, 25, 30, 40, 50, 60] as const;
/** Moves each way: the first only takes out the play, and what the way there left. */
const FINE_MOVES = 4;

export function* deadbandStep(bench: Bench, servo: BenchServo): Step<Outcome> {
  const { arm, joint, middleUs, lowUs, highUs } = servo;
  const attempt = nextAttempt(bench, 'servo-step', arm, joint);
  const kept = (pulseUs: number, moved: boolean): void =>
    keep(bench, [{ ...emptyCapture('servo-step', arm, joint), pulseUs, moved: moved ? 1 : 0, attempt }]);
  let at = Math.round(middleUs);
  let lines: readonly string[] = [
    `${joint} of ${arm} now creeps on by single microseconds. Watch the end of something long on its horn, and listen.`,
    'Enter each time it stood still; m as soon as it moved; stop when you have enough.',
  ];
  /** On from where it is until it is seen to move. */
  const creep = function* (way: 1 | -1): Step<Crept> {
    const from = at;
    for (const step of FINE_STEPS_US) {
      const next = from + way * step;
      if (next < lowUs || next > highUs) break;
      at = next;
      yield* jogTo(bench, servo, at, '');
      const crept = yield* seen(prompt(lines, `At ${at} us (Enter: it stood; m: it moved; stop: enough): `));
      lines = [];
      if (crept === 'stop') return 'stop';
      kept(at, crept === 'moved');
      if (crept === 'moved') return 'moved';
    }
    lines = [`It stood all the way to ${at} us.`];
    return 'stood';
  };
  yield* jogTo(bench, servo, at);
  kept(at, true);
  let moves = 0;
  let last: Crept = 'moved';
  for (const way of [1, -1] as const) {
    if (last !== 'stop') last = 'moved';
    for (let move = 0; move < FINE_MOVES && last === 'moved'; move++) {
      last = yield* creep(way);
      if (last === 'moved') moves++;
    }
  }
  yield* home(bench);
  if (moves === 0)
    return undone(`${joint}: it was not seen to move; look to its plug and its supply, then do it again.`);
  return done(servoFound(bench, servo, ['deadband', 'backlash']));
}

type Crept = 'stood' | 'moved' | 'stop';

function* seen(asked: Prompt): Step<Crept> {
  for (let shown = asked; ; shown = prompt(['Enter if it stood still, m if it moved.'], asked.ask)) {
    const text = yield* answer(shown);
    if (text === '') return 'stood';
    if (text === 'm') return 'moved';
    if (text === 'stop') return 'stop';
  }
}
