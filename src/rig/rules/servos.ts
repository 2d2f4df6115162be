import { nearest } from '../../port/nearest.ts';
import { servosOf } from '../servo-list.ts';
import type { ListedServo } from '../servo-list.ts';
import type { FollowerProfile } from '../schema/follower.ts';
import type { Loose } from '../shape.ts';
import type { Note } from './note.ts';
import { columnSpan, isSpan, pointsRule } from './spans.ts';
import type { Span } from './spans.ts';

type LooseFollower = Loose<FollowerProfile>;
type LooseJoint = NonNullable<LooseFollower['joints']>[number];
type LooseServo = NonNullable<LooseFollower['servos']>[number];
type Listed = ListedServo<LooseJoint, LooseServo>;

/** Sums of weighted angles are rounded: this much past a point is still the point. */
const SLACK_DEG = 1e-9;

/** Every joint is turned, by servos whose points cover all that may be asked of them. */
export function servoRules(follower: LooseFollower, note: Note): void {
  for (const { servo, path } of servosOf(follower)) {
    pointsRule(servo.points, ['degrees', 'microseconds'], [...path, 'points'], note);
  }
  coverageRule(follower, note);
  for (const listed of servosOf(follower)) {
    if (listed.joint === null) coupledRule(listed, follower, note);
    else ownRule(listed, listed.joint, note);
  }
}

function coverageRule({ joints = [], servos = [] }: LooseFollower, note: Note): void {
  const coupled = new Set(servos.flatMap((servo) => Object.keys(servo.turns ?? {})));
  for (const [i, joint] of joints.entries()) {
    const { name } = joint;
    // A malformed `servo` is there, with a mistake of its own.
    if (name === undefined || ('servo' in joint && joint.servo === undefined)) continue;
    if (joint.servo !== undefined && coupled.has(name)) {
      const wrong = `${name} has servo: and is turned by servos: too`;
      note('RIG_SERVO_BOTH', ['joints', i, 'servo'], wrong, 'keep one of the two');
    }
    if (joint.servo === undefined && !coupled.has(name)) {
      const right = `give it servo: { channel: 5, points: [[-90, 560], [90, 2440]] }, or an entry in servos:`;
      note('RIG_SERVO_MISSING', ['joints', i], `no servo turns ${name}`, right);
    }
  }
}

function ownRule({ servo, path }: Listed, joint: LooseJoint, note: Note): void {
  const span = columnSpan(servo.points, 0);
  const { range_deg: range } = joint;
  if (span === null || !isSpan(range)) return;
  for (const [end, angle] of range.entries()) {
    if (angle >= span[0] - SLACK_DEG && angle <= span[1] + SLACK_DEG) continue;
    const wrong = `range_deg ${angle} is beyond the servo points, which span ${span[0]} to ${span[1]} degrees`;
    const right = `keep range_deg within ${span[0]} to ${span[1]}, or measure points further out`;
    note('RIG_RANGE_BEYOND_SERVO', [...path.slice(0, -1), 'range_deg', end], wrong, right);
  }
}

function coupledRule({ servo, path, turns: weights }: Listed, follower: LooseFollower, note: Note): void {
  const joints = follower.joints ?? [];
  const names = joints.flatMap(({ name }) => (name === undefined ? [] : [name]));
  const turns = Object.entries(weights);
  const turnsAt = [...path, 'turns'];
  if ('turns' in servo && servo.turns !== undefined && turns.length === 0)
    note(
      'RIG_SERVO_MISSING',
      turnsAt,
      'this servo turns no joint',
      'name the joints it turns, such as { shoulder: 1 }',
    );
  let reach: Span | null = [0, 0];
  for (const [name, weight] of turns) {
    if (weight === 0)
      note('RIG_VALUE_BOUNDS', [...turnsAt, name], `the weight of ${name} is 0`, 'give another weight, or remove it');
    if (joints.every((joint) => joint.name !== undefined) && !names.includes(name)) {
      const near = nearest(name, names);
      const right = near === null ? `its joints are ${names.join(', ')}` : `did you mean ${near}?`;
      note('RIG_JOINT_UNKNOWN', [...turnsAt, name], `this follower has no joint ${name}`, right);
    }
    const range = joints.find((joint) => joint.name === name)?.range_deg;
    reach = reach === null || weight === undefined || !isSpan(range) ? null : widened(reach, weight, range);
  }
  const span = columnSpan(servo.points, 0);
  if (reach === null || span === null || turns.length === 0) return;
  if (reach[0] >= span[0] - SLACK_DEG && reach[1] <= span[1] + SLACK_DEG) return;
  const asked = `the joints' ranges ask for ${tidy(reach[0])} to ${tidy(reach[1])} degrees`;
  const wrong = `${asked}, beyond the servo points, which span ${span[0]} to ${span[1]} degrees`;
  note('RIG_RANGE_BEYOND_SERVO', turnsAt, wrong, 'narrow range_deg of these joints, or measure points further out');
}

/** The sum over the whole box of ranges: every corner of it may be asked for. */
function widened(reach: Span, weight: number, range: Span): Span {
  const ends = [weight * range[0], weight * range[1]] as const;
  return [reach[0] + Math.min(...ends), reach[1] + Math.max(...ends)];
}

function tidy(angle: number): number {
  return Number(angle.toFixed(6));
}
