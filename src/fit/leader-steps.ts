import type { LeaderJoint } from '../rig/schema/leader.ts';
import {
  answer,
  type Bench,
  capturesOf,
  channelOfInput,
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
import type { Capture } from './captures.ts';
import { leaderFigures } from './figures.ts';
import { fitLeaderJoint, POINTS_ENOUGH } from './leader-part.ts';
import { problemLine } from './problems.ts';
import type { Prompt, Tape } from './prompt.ts';
import { wiringOf } from './wiring.ts';

/** Steps of the leader, each for one joint; they return what was found, in words. */

const US_PER_MS = 1000;
/** Ten minutes of one joint at a hundred readings a second. */
const SWEEP_READINGS_MAX = 60_000;
/** A sweep of fewer readings was none. */
const SWEEP_READINGS_MIN = 100;
const STILL_READINGS = 200;
const TAPE_CELLS = 50;

function nameOf(bench: Bench, joint: number): string {
  return (bench.profiles.leader.joints[joint] as LeaderJoint).name;
}

export function* wiringStep(bench: Bench, joint: number): Step<Outcome> {
  const { leader } = bench.profiles;
  const name = nameOf(bench, joint);
  const inputs = leader.joints.length + leader.buttons.length;
  const width = leader.counts[1] - leader.counts[0];
  const asked = prompt(
    [`Move ${name} of ${leader.leader}, and no other joint, a good way there and back, for some seconds.`],
    'Enter when you have: ',
  );
  const seen: Float64Array[] = [];
  for (let shown: Prompt = asked; ; shown = { ...asked, lines: [] }) {
    const event = yield shown;
    if (event.kind === 'reading' && seen.length < SWEEP_READINGS_MAX) seen.push(event.counts.slice());
    if (event.kind === 'line') break;
  }
  if (seen.length < SWEEP_READINGS_MIN)
    return undone('No readings came, so nothing is known of its wiring; look to the port.');
  const { input, shared, noisy } = wiringOf(seen, inputs, width);
  const told = (i: number): string => `${inputName(bench, i)} (channel ${channelOfInput(bench, i)})`;
  const words = noisy.map(
    (i) => `${told(i)} jumps about by itself; look for a loose wire, or a pot without its supply.`,
  );
  words.push(...shared.map((i) => `${told(i)} moves along; look for a wire that the two share, or a weak supply.`));
  if (input === null)
    return done([...words, `Nothing moved with ${name}: its channel is dead; look to its wires, or mend channel:.`]);
  if (input === joint)
    return done([...words, `${name} is on channel ${channelOfInput(bench, input)}, as the profile says.`]);
  // Two joints that were swapped trade places, so that neither is read as the other.
  const other = bench.inputOf.indexOf(input);
  if (other >= 0) bench.inputOf[other] = bench.inputOf[joint] as number;
  bench.inputOf[joint] = input;
  return done([
    ...words,
    `${name} is on channel ${channelOfInput(bench, input)}, which the profile gives to ${inputName(bench, input)}; ` +
      'it is measured there from now on, and the profile will say so.',
  ]);
}

function inputName({ profiles: { leader } }: Bench, input: number): string {
  return [...leader.joints, ...leader.buttons][input]?.name ?? `input ${input}`;
}

export function* stillStep(bench: Bench): Step<Outcome> {
  const { leader } = bench.profiles;
  yield* answer(
    prompt([`Lay ${leader.leader} down so that no joint moves, and take your hands off.`], 'Enter when it lies: '),
  );
  const rows: Capture[] = [];
  const attempts = leader.joints.map(({ name }) => nextAttempt(bench, 'leader-still', leader.leader, name));
  const wait = prompt(['Two seconds ...']);
  let count = 0;
  for (let shown = wait; count < STILL_READINGS; shown = { ...wait, lines: [] }) {
    const event = yield shown;
    if (event.kind !== 'reading') continue;
    count++;
    leader.joints.forEach((_, joint) => {
      const counts = event.counts[bench.inputOf[joint] as number] as number;
      const attempt = attempts[joint] as number;
      if (!Number.isNaN(counts))
        rows.push({ ...leaderCapture(bench, 'leader-still', joint), counts, tMs: event.tUs / US_PER_MS, attempt });
    });
  }
  keep(bench, rows);
  return done(leader.joints.flatMap((_, joint) => found(bench, joint, ['noise at rest'])));
}

export function* sweepStep(bench: Bench, joint: number): Step<Outcome> {
  const { leader } = bench.profiles;
  const name = nameOf(bench, joint);
  const [lowest, highest] = leader.counts;
  const tape: Tape = { lowest, highest, visited: new Uint8Array(TAPE_CELLS), now: Number.NaN };
  const asked: Prompt = {
    lines: [
      `Take ${name} slowly from one stop to the other and back, twice; ten seconds each way is right.`,
      'Rest a second at each stop. On the way, rest at one mark too, each time you come by: it shows hysteresis.',
    ],
    ask: 'Enter when you are through: ',
    tape,
  };
  const attempt = nextAttempt(bench, 'leader-sweep', leader.leader, name);
  const rows: Capture[] = [];
  for (let shown = asked; ; shown = { ...asked, lines: [] }) {
    const event = yield shown;
    if (event.kind === 'line') break;
    if (event.kind !== 'reading' || rows.length >= SWEEP_READINGS_MAX) continue;
    const counts = event.counts[bench.inputOf[joint] as number] as number;
    if (Number.isNaN(counts)) continue;
    tape.now = counts;
    tape.visited[Math.min(TAPE_CELLS - 1, Math.floor(((counts - lowest) / (highest - lowest)) * TAPE_CELLS))] = 1;
    rows.push({ ...leaderCapture(bench, 'leader-sweep', joint), counts, tMs: event.tUs / US_PER_MS, attempt });
  }
  if (rows.length < SWEEP_READINGS_MIN)
    return undone(`Only ${rows.length} readings came: that is no sweep; look to the port, then do it again.`);
  keep(bench, rows);
  return done(found(bench, joint, ['travel', 'noise', 'effective', 'dead', 'gaps', 'hysteresis']));
}

export function* pointsStep(bench: Bench, joint: number): Step<Outcome> {
  const { leader } = bench.profiles;
  const name = nameOf(bench, joint);
  const attempt = nextAttempt(bench, 'leader-point', leader.leader, name);
  let taken = 0;
  let lines: readonly string[] = [
    `Set ${name} to angles you know (a protractor, a square block, a printed fixture), ${POINTS_ENOUGH + 1} or more,`,
    'spread over its whole travel. Write each angle while you hold it there.',
  ];
  for (;;) {
    const angle = yield* numberOrNothing(prompt(lines, `Angle of ${name} in degrees (Enter ends): `));
    if (angle === null) break;
    const held = yield* hold(bench, joint);
    if (!held.still) {
      lines = [holdRefused(held)];
      continue;
    }
    taken++;
    const capture = leaderCapture(bench, 'leader-point', joint);
    keep(bench, [{ ...capture, counts: held.mean, knownDeg: angle, noiseCounts: held.noise, attempt }]);
    lines = [`Point ${taken}: ${held.mean.toFixed(1)} counts at ${angle} deg.`];
  }
  return taken === 0
    ? undone('No point was taken.')
    : done(found(bench, joint, ['map', 'error', 'residual', 'independent']));
}

/** Figures and sentences of a joint from what has been captured so far. */
function found(bench: Bench, joint: number, wanted: readonly string[]): readonly string[] {
  const { leader } = bench.profiles;
  const name = nameOf(bench, joint);
  const { report, problems } = fitLeaderJoint(leader, joint, capturesOf(bench, leader.leader, name));
  const figures = leaderFigures(report).filter(([what]) => wanted.some((begins) => what.startsWith(begins)));
  return [
    ...figures.map(([what, value]) => `${name}: ${what}: ${value}`),
    ...report.notes.map((note) => `${name}: ! ${note}`),
    ...problems.map(problemLine),
  ];
}
