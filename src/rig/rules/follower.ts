import { nearest } from '../../port/nearest.ts';
import type { Path } from '../located.ts';
import type { FollowerProfile } from '../schema/follower.ts';
import type { Loose } from '../shape.ts';
import { noteRepeats } from './note.ts';
import type { Note } from './note.ts';
import { isSpan, spanRule } from './spans.ts';
import type { Span } from './spans.ts';

type LooseFollower = Loose<FollowerProfile>;
type LooseJoint = NonNullable<LooseFollower['joints']>[number];

/** `all` stands for every follower wherever one can be named. */
const FOLLOWER_NAMES_RESERVED = ['all'];
/** Poses every arm has. */
const POSE_NAMES_RESERVED = ['rest', 'last'];

/** What a follower says about itself must not contradict itself; its servos are judged apart. */
export function followerRules(follower: LooseFollower, note: Note): void {
  const { joints = [], follower: name } = follower;
  if (name !== undefined && FOLLOWER_NAMES_RESERVED.includes(name))
    note('RIG_NAME_RESERVED', ['follower'], `${name} stands for every follower in commands`, 'choose another name');
  const names = joints.map((joint, i) => ({ value: joint.name, path: ['joints', i, 'name'], what: 'joint' }));
  noteRepeats(names, (value, path) =>
    note('RIG_NAME_TWICE', path, `${value} is already the name of a joint`, 'name each joint differently'),
  );
  for (const [i, joint] of joints.entries()) jointRules(joint, ['joints', i], note);
  poseRules(follower, note);
}

function jointRules(joint: LooseJoint, path: Path, note: Note): void {
  const { range_deg: range, rest_deg: rest, from } = joint;
  spanRule(range, 'degrees', [...path, 'range_deg'], note);
  if (isSpan(range) && rest !== undefined && !within(rest, range)) {
    const wrong = `rest_deg ${rest} is outside range_deg, ${range[0]} to ${range[1]} degrees`;
    note('RIG_REST_OUTSIDE', [...path, 'rest_deg'], wrong, `give rest_deg an angle within ${range[0]} to ${range[1]}`);
  }
  if (typeof from === 'object') {
    if (Object.keys(from).length === 0)
      note(
        'RIG_LIST_LENGTH',
        [...path, 'from'],
        'from names no joint',
        'name one, or remove from: to keep it at rest_deg',
      );
    for (const [source, weight] of Object.entries(from)) {
      if (weight !== 0) continue;
      const wrong = `the weight of ${source} is 0`;
      note('RIG_VALUE_BOUNDS', [...path, 'from', source], wrong, 'give another weight, or remove it');
    }
  }
  if (joint.stretch === true) stretchRule(joint, path, note);
}

function stretchRule(joint: LooseJoint, path: Path, note: Note): void {
  const { from } = joint;
  // A malformed `from` is there, with a mistake of its own.
  if (typeof from === 'string' || ('from' in joint && from === undefined)) return;
  const weights = Object.values(from ?? {});
  if (weights.length === 1 && weights[0] === 1) return;
  const wrong =
    from === undefined ? 'stretch has no leader joint to lay over the range' : 'stretch needs one plain leader joint';
  const right = 'write from: with one leader joint (direction: reversed turns it round), or use gain and offset_deg';
  note('RIG_STRETCH_SOURCES', [...path, 'stretch'], wrong, right);
}

function poseRules({ poses = {}, joints = [] }: LooseFollower, note: Note): void {
  const names = joints.flatMap(({ name }) => (name === undefined ? [] : [name]));
  for (const [pose, angles] of Object.entries(poses)) {
    if (POSE_NAMES_RESERVED.includes(pose))
      note('RIG_NAME_RESERVED', ['poses', pose], `every arm has a pose ${pose} already`, 'choose another name');
    for (const [joint, angle] of Object.entries(angles ?? {})) {
      const path = ['poses', pose, joint];
      const range = joints.find(({ name }) => name === joint)?.range_deg;
      if (names.length === joints.length && !names.includes(joint)) {
        const near = nearest(joint, names);
        const right = near === null ? `its joints are ${names.join(', ')}` : `did you mean ${near}?`;
        note('RIG_JOINT_UNKNOWN', path, `this follower has no joint ${joint}`, right);
      }
      if (angle === undefined || !isSpan(range) || within(angle, range)) continue;
      const wrong = `${angle} is outside the range of ${joint}, ${range[0]} to ${range[1]} degrees`;
      note('RIG_POSE_OUTSIDE', path, wrong, `give an angle within ${range[0]} to ${range[1]}`);
    }
  }
}

function within(angle: number, range: Span): boolean {
  return angle >= range[0] && angle <= range[1];
}
