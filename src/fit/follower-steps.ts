import type { FollowerProfile } from '../rig/schema/follower.ts';
import {
  answer,
  type Bench,
  type BenchServo,
  capturesOf,
  done,
  hold,
  holdRefused,
  keep,
  leaderCapture,
  nextAttempt,
  numberOrNothing,
  type Outcome,
  prompt,
  type Step,
  undone,
} from './bench.ts';
import { emptyCapture } from './captures.ts';
import { matchFigures } from './figures.ts';
import { hornCentring } from './horn.ts';
import { home, jogTo } from './motion.ts';
import { problemLine } from './problems.ts';
import { fitted, servoFound } from './servo-found.ts';
import { round } from './words.ts';

/** Steps of a follower's servo; they return what was found, in words. */

const TEETH = 25;
/** A few degrees on a usual servo: to be seen, and to hit nothing. */
const NUDGE_US = 60;
/** One step outward: about ten degrees on a usual servo. */
const TRAVEL_STEP_US = 100;
/** Poses that a joint is parked in for matching, as shares of its servo's span, in an order that saves waiting. */
const MATCH_SHARES = [0.5, 0.7, 0.9, 0.6, 0.4, 0.1, 0.3] as const;

export function* hornStep(bench: Bench, servo: BenchServo): Step<Outcome> {
  yield* jogTo(bench, servo, servo.middleUs);
  const off = yield* numberOrNothing(
    prompt(
      [
        `${servo.arm} ${servo.joint} is at its middle pulse, ${round(servo.middleUs, 0)} us.`,
        'Put the horn on as near to the middle of the joint’s travel as the spline lets you.',
      ],
      'By how many degrees does it then stand past the middle (minus: short of it; Enter: unknown)? ',
    ),
  );
  if (off === null) {
    yield* home(bench);
    return undone(`${servo.joint}: the horn was not measured.`);
  }
  const teeth = yield* numberOrNothing(prompt([], `Teeth of the spline (Enter: ${TEETH}): `));
  const { stepDeg, steps, leftDeg } = hornCentring(off, Math.max(1, Math.abs(teeth ?? TEETH)));
  yield* home(bench);
  const left = `${round(leftDeg, 1)} deg are left for the map`;
  if (steps === 0) return done([`${servo.joint}: no spline step (${round(stepDeg, 1)} deg) comes nearer; ${left}.`]);
  const turn = `${Math.abs(steps)} step${Math.abs(steps) === 1 ? '' : 's'} of ${round(stepDeg, 1)} deg`;
  return done([`${servo.joint}: turn the horn by ${turn} ${steps > 0 ? 'forward' : 'back'} on its spline; ${left}.`]);
}

export function* servoWiringStep(bench: Bench, servo: BenchServo): Step<Outcome> {
  const profile = bench.profiles.followers[servo.follower] as FollowerProfile;
  const names = profile.joints.map(({ name }) => name);
  yield* jogTo(bench, servo, servo.middleUs);
  yield* answer(
    prompt(
      [`The servo on channel ${servo.channel} will now turn a few degrees, slowly, and stay. Watch ${servo.arm}.`],
      'Enter: ',
    ),
  );
  yield* jogTo(bench, servo, Math.min(servo.highUs, servo.middleUs + NUDGE_US));
  const which = yield* answer(prompt([], `Which joint moved (${names.join(', ')}, or none)? `));
  const words: string[] = [];
  if (which === 'none' || which === '')
    words.push(`The servo on channel ${servo.channel} did not move; look to its plug and its supply.`);
  else if (which !== servo.joint) {
    const known = names.includes(which) ? `it moved ${which}` : `what moved, ${which}, is no joint of the profile`;
    words.push(
      `Channel ${servo.channel} should turn ${servo.joint}, but ${known}; swap the plugs, or mend channel: in the profile.`,
    );
  } else {
    const way = yield* answer(prompt([], 'Did its angle rise (yes, or no: it fell)? '));
    const rises = risesWithPulse(profile, servo);
    if ((way === 'no') === rises)
      words.push(
        `${servo.joint} turns against its points: as pulses rise, its angle ${rises ? 'falls' : 'rises'}; measuring its travel will set that right.`,
      );
    else words.push(`Channel ${servo.channel} turns ${servo.joint}, the way its points say.`);
  }
  yield* home(bench);
  return done(words);
}

function risesWithPulse(profile: FollowerProfile, { joint }: BenchServo): boolean {
  const points = profile.joints.find(({ name }) => name === joint)?.servo?.points ?? [];
  const [first, last] = [points[0], points.at(-1)];
  return first === undefined || last === undefined || (last[1] - first[1]) * (last[0] - first[0]) > 0;
}

export function* travelStep(bench: Bench, servo: BenchServo): Step<Outcome> {
  const { arm, joint, lowUs, highUs, middleUs } = servo;
  const attempt = nextAttempt(bench, 'servo-point', arm, joint);
  let taken = 0;
  let lines: readonly string[] = [
    `${joint} of ${arm} goes outward from its middle in small slow steps, one way and back, then the other way.`,
    'Measure its angle at each stop and write it in degrees, counted the way the joint’s angles are.',
    'Write stop before it touches its mechanical end: it then turns round.',
  ];
  for (const way of [1, -1] as const) {
    const end = way === 1 ? highUs : lowUs;
    const stops: number[] = [];
    for (let us = middleUs; way * (end - us) > -1e-6; us += way * TRAVEL_STEP_US) stops.push(us);
    // The outermost pulse is measured whatever the steps come to: the map ends there.
    if (Math.abs((stops.at(-1) as number) - end) > 1) stops.push(end);
    const reached: number[] = [];
    let turned = false;
    const take = function* (us: number): Step<'taken' | 'stop'> {
      yield* jogTo(bench, servo, us);
      for (;;) {
        const text = yield* answer(
          prompt(lines, `Angle at ${round(us, 0)} us (stop: no further; Enter: not measured): `),
        );
        lines = [];
        if (text === 'stop') return 'stop';
        if (text === '') return 'taken';
        const angle = Number(text);
        if (Number.isFinite(angle)) {
          taken++;
          keep(bench, [{ ...emptyCapture('servo-point', arm, joint), pulseUs: us, knownDeg: angle, attempt }]);
          return 'taken';
        }
        lines = ['That is no number. Write it with a point, such as 12.5.'];
      }
    };
    for (const us of stops) {
      if ((yield* take(us)) === 'stop') {
        turned = true;
        break;
      }
      reached.push(us);
    }
    if (turned) lines = ['It turns round.'];
    // Back at every second stop: what is lost as it turns back shows there.
    for (const us of reached
      .toReversed()
      .slice(1)
      .filter((_, i) => i % 2 === 0)) {
      if ((yield* take(us)) === 'stop') break;
    }
  }
  yield* home(bench);
  if (taken === 0) return undone('No angle was written.');
  return done(servoFound(bench, servo, null));
}

/** @param source index of the leader joint that it copies */
export function* matchStep(bench: Bench, servo: BenchServo, source: number): Step<Outcome> {
  const { arm, joint, lowUs, highUs } = servo;
  const from = bench.profiles.leader.joints[source]?.name ?? '';
  const attempt = nextAttempt(bench, 'match', arm, joint);
  const span = spanOf(bench, servo) ?? [lowUs, highUs];
  let taken = 0;
  let lines: readonly string[] = [
    `${joint} of ${arm} is parked in a few poses. Set ${from} of the leader so that it looks alike each time, and hold it there.`,
  ];
  for (const share of MATCH_SHARES) {
    const us = Math.round(span[0] + share * (span[1] - span[0]));
    yield* jogTo(bench, servo, us);
    for (;;) {
      const text = yield* answer(
        prompt(
          lines,
          `Pose ${taken + 1} of ${MATCH_SHARES.length}: Enter while you hold it (next: leave this pose out): `,
        ),
      );
      lines = [];
      if (text === 'next') break;
      const held = yield* hold(bench, source);
      if (held.still) {
        taken++;
        const capture = {
          ...emptyCapture('match', arm, joint),
          channel: leaderCapture(bench, 'match', source).channel,
        };
        keep(bench, [{ ...capture, counts: held.mean, pulseUs: us, noiseCounts: held.noise, attempt }]);
        break;
      }
      lines = [holdRefused(held)];
    }
  }
  yield* home(bench);
  if (taken === 0) return undone('No pose was taken.');
  const { match, problems } = fitted(bench, servo);
  return done([
    ...(match === null ? [] : matchFigures(match).map(([what, value]) => `${joint}: ${what}: ${value}`)),
    ...(match?.notes ?? []).map((note) => `${joint}: ! ${note}`),
    ...problems.map(problemLine),
  ]);
}

/** Pulses between which its travel was measured. */
function spanOf(bench: Bench, { arm, joint }: BenchServo): readonly [number, number] | null {
  const pulses = capturesOf(bench, arm, joint).of['servo-point'].map(({ pulseUs }) => pulseUs);
  return pulses.length < 2 ? null : [Math.min(...pulses), Math.max(...pulses)];
}
