import { nearest } from '../../port/nearest.ts';
import type { Path } from '../located.ts';
import { lengthMm } from '../reach.ts';
import type { Vector } from '../reach.ts';
import type { Arm } from '../schema/arm.ts';
import type { Loose } from '../shape.ts';
import { noteRepeats } from './note.ts';
import type { Note } from './note.ts';

interface WithArm {
  readonly joints?: readonly { readonly name?: string | undefined }[] | undefined;
  readonly arm?: Loose<Arm> | undefined;
  readonly keep_out?: readonly object[] | undefined;
}

/** Links belong to joints, and what is measured has a length. */
export function armRules(profile: WithArm, note: Note): void {
  keepOutRule(profile, note);
  const links = profile.arm?.links;
  if (links === undefined) return;
  const names = (profile.joints ?? []).flatMap(({ name }) => (name === undefined ? [] : [name]));
  const joints = links.map((link, i) => ({ value: link.joint, path: ['arm', 'links', i, 'joint'], what: 'link' }));
  noteRepeats(joints, (joint, path) =>
    note('RIG_NAME_TWICE', path, `${joint} already turns a link`, 'give each link a joint of its own'),
  );
  for (const [i, link] of links.entries()) {
    const path = ['arm', 'links', i];
    if (link.joint !== undefined && names.length === profile.joints?.length && !names.includes(link.joint)) {
      const near = nearest(link.joint, names);
      const right = near === null ? `its joints are ${names.join(', ')}` : `did you mean ${near}?`;
      note('RIG_JOINT_UNKNOWN', [...path, 'joint'], `there is no joint ${link.joint}`, right);
    }
    springRule(link.spring?.from_mm, link.spring?.to_mm, [...path, 'spring'], note);
  }
  if (links.every((link) => link.to_mm !== undefined && lengthMm(link.to_mm) === 0))
    note('RIG_ARM', ['arm', 'links'], 'the arm has no length', 'give to_mm of each link, in millimetres');
}

function springRule(from: Vector | undefined, to: Vector | undefined, path: Path, note: Note): void {
  if (from === undefined || to === undefined || from.some((value, i) => value !== to[i])) return;
  note('RIG_ARM', path, 'both ends of the spring are at one place', 'give from_mm and to_mm, in millimetres');
}

function keepOutRule({ keep_out: boxes = [] }: WithArm, note: Note): void {
  for (const [i, box] of boxes.entries()) {
    if (!('box_mm' in box)) continue;
    const [low, high] = box.box_mm as readonly [Vector, Vector];
    if (low.every((value, axis) => value < (high[axis] ?? value))) continue;
    const wrong = 'the first corner of the box is not the lower one on every axis';
    note(
      'RIG_SPAN_ORDER',
      ['keep_out', i, 'box_mm'],
      wrong,
      'write [[lowest x, y, z], [highest x, y, z]], in millimetres',
    );
  }
}
