import type { Path } from '../located.ts';
import type { LeaderProfile } from '../schema/leader.ts';
import type { Loose } from '../shape.ts';
import { noteRepeats } from './note.ts';
import type { Note } from './note.ts';
import { isSpan, pointsRule, spanRule } from './spans.ts';
import type { Span } from './spans.ts';

type LooseLeader = Loose<LeaderProfile>;
type LooseJoint = NonNullable<LooseLeader['joints']>[number];
type LooseButton = NonNullable<LooseLeader['buttons']>[number];

/** What a leader says about itself must not contradict itself. */
export function leaderRules(leader: LooseLeader, note: Note): void {
  const { counts } = leader;
  spanRule(counts, 'counts', ['counts'], note);
  for (const [i, joint] of (leader.joints ?? []).entries()) jointRules(joint, counts, ['joints', i], note);
  for (const [i, button] of (leader.buttons ?? []).entries()) buttonRules(button, counts, ['buttons', i], note);
  nameRules(leader, note);
  timeoutRule(leader, note);
}

/** Only firmata is told how often to read; of other boards nobody can know. */
function timeoutRule({ wire, sampling_ms: sampling, timeout_ms: timeout }: LooseLeader, note: Note): void {
  if (wire !== 'firmata' || sampling === undefined || timeout === undefined || sampling < timeout) return;
  const wrong = `a reading every ${sampling} ms is always older than timeout_ms, ${timeout}, before the next`;
  note('RIG_TIMEOUT_SHORT', ['sampling_ms'], wrong, 'give sampling_ms well under timeout_ms, such as 10');
}

/** Joints and buttons share the names of a line's `name:value`. */
function nameRules({ joints = [], buttons = [] }: LooseLeader, note: Note): void {
  const entries = [
    ...joints.map((joint, i) => ({ value: joint.name, path: ['joints', i, 'name'], what: 'joint' })),
    ...buttons.map((button, i) => ({ value: button.name, path: ['buttons', i, 'name'], what: 'button' })),
  ];
  noteRepeats(entries, (name, path, _what, former) =>
    note(
      'RIG_NAME_TWICE',
      path,
      `${name} is already the name of a ${former}`,
      'name each joint and button differently',
    ),
  );
}

function jointRules(joint: LooseJoint, counts: Span | undefined, path: Path, note: Note): void {
  const { points, travel_counts: travel, despike } = joint;
  pointsRule(points, ['counts', 'degrees'], [...path, 'points'], note);
  for (const [i, [count]] of (points ?? []).entries()) {
    countsRule(count, counts, [...path, 'points', i, 0], note, 'a point is [counts, degrees]');
  }
  spanRule(travel, 'counts', [...path, 'travel_counts'], note);
  for (const [i, count] of (travel ?? []).entries())
    countsRule(count, counts, [...path, 'travel_counts', i], note, null);
  if (despike !== undefined && despike % 2 === 0) {
    const wrong = `despike ${despike} is even: a median needs a middle`;
    note('RIG_DESPIKE_EVEN', [...path, 'despike'], wrong, `use ${despike - 1} or ${despike + 1} readings; 1 is off`);
  }
}

function countsRule(count: number, counts: Span | undefined, path: Path, note: Note, hint: string | null): void {
  if (!isSpan(counts) || (count >= counts[0] && count <= counts[1])) return;
  const wrong = `${count} is outside what the converter can read, ${counts[0]} to ${counts[1]} counts`;
  const right = `mend it, or widen counts (12 bits: [0, 4095])${hint === null ? '' : `; ${hint}`}`;
  note('RIG_COUNTS_OUTSIDE', path, wrong, right);
}

function buttonRules(button: LooseButton, counts: Span | undefined, path: Path, note: Note): void {
  const { pressed, counts: threshold } = button;
  if (threshold === undefined || !isSpan(counts)) return;
  countsRule(threshold, counts, [...path, 'counts'], note, null);
  const never = pressed === 'below' ? threshold === counts[0] : pressed === 'above' && threshold === counts[1];
  if (!never) return;
  const wrong = `no reading is ${pressed} ${threshold} counts: the button could never be pressed`;
  note('RIG_BUTTON_NEVER', [...path, 'counts'], wrong, 'put the threshold between what it reads released and pressed');
}
