import { answer, type Bench, type BenchServo, prompt, type Step } from './bench.ts';

/** Nobody has put a follower's horns aside yet. */
function* cleared(bench: Bench, servo: BenchServo): Step {
  if (!bench.cleared.has(servo.follower)) {
    const first = prompt(
      [
        `${servo.arm} is about to get its first pulses: every servo runs to the middle of its points at full speed.`,
        'Take the horns off, or hold the arm where nothing is hit. Keep a hand on the power.',
      ],
      'Type yes when it is safe: ',
    );
    for (let shown = first; (yield* answer(shown)) !== 'yes'; shown = prompt([], first.ask));
    bench.cleared.add(servo.follower);
  }
  if (bench.awake.has(servo.follower)) return;
  bench.effects.push({ kind: 'wake', follower: servo.follower });
  const waiting = prompt([`${servo.arm} is waking, one servo after another ...`]);
  for (let shown = waiting; !bench.awake.has(servo.follower); shown = { ...waiting, lines: [] }) yield shown;
}

/**
 * Sends a servo somewhere, slowly, and returns when it is there. Another one that is away comes home first.
 * @param words what is said meanwhile; where it goes to, when absent
 */
export function* jogTo(bench: Bench, servo: BenchServo, pulseUs: number, words?: string): Step {
  yield* cleared(bench, servo);
  const { away } = bench;
  if (away !== null && (away.follower !== servo.follower || away.servo !== servo.servo)) yield* home(bench);
  bench.away = { follower: servo.follower, servo: servo.servo };
  bench.effects.push({ kind: 'jog', follower: servo.follower, servo: servo.servo, pulseUs });
  const said = words ?? `${servo.arm} ${servo.joint} goes to ${Math.round(pulseUs)} us ...`;
  yield* arrived(servo.follower, false, said === '' ? [] : [said]);
}

/** Brings the servo that is away back to where its joint says. */
export function* home(bench: Bench): Step {
  const { away } = bench;
  if (away === null) return;
  sendHome(bench);
  yield* arrived(away.follower, true, ['The last servo goes back to its middle ...']);
}

/** The same without waiting, for a step that is left. */
export function sendHome(bench: Bench): void {
  if (bench.away !== null) bench.effects.push({ kind: 'jog', ...bench.away, pulseUs: Number.NaN });
}

function* arrived(follower: number, isHome: boolean, words: readonly string[]): Step {
  for (let shown = prompt(words); ; shown = prompt([])) {
    const event = yield shown;
    if (event.kind === 'jogged' && event.follower === follower && event.home === isHome) return;
  }
}
