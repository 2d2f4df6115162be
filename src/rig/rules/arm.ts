import { nearest } from '../../port/nearest.ts';
import { axisOf } from '../compile-arm.ts';
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
}

type LooseLink = NonNullable<NonNullable<WithArm['arm']>['links']>[number];

/** A spring end closer to the joint's axis than this has no lever, millimetres. */
const NO_LEVER_MM = 1e-9;

/** Links belong to joints, and what is measured has a length. */
export function armRules(profile: WithArm, note: Note): void {
  const { links, base } = profile.arm ?? {};
  if (base !== undefined) baseRules(base, note);
  if (links === undefined) return;
  jointRules(links, profile.joints ?? [], note);
  for (const [i, link] of links.entries()) {
    const path = ['arm', 'links', i];
    if (typeof link.axis === 'object' && lengthMm(link.axis as Vector) === 0)
      note(
        'RIG_ARM',
        [...path, 'axis'],
        'this axis points nowhere',
        'give x, y, z, or a direction such as [0, 0.6, 0.8]',
      );
    springRules(link, i === 0 ? [0, 0, 0] : links[i - 1]?.to_mm, [...path, 'spring'], note);
  }
  if (links.every((link) => link.to_mm !== undefined && lengthMm(link.to_mm) === 0))
    note('RIG_ARM', ['arm', 'links'], 'the arm has no length', 'give to_mm of each link, in millimetres');
}

/** Every link is turned by a joint of its own, in the order of the joints. */
function jointRules(links: readonly LooseLink[], joints: NonNullable<WithArm['joints']>, note: Note): void {
  const names = joints.flatMap(({ name }) => (name === undefined ? [] : [name]));
  const turned = links.map((link, i) => ({ value: link.joint, path: ['arm', 'links', i, 'joint'], what: 'link' }));
  noteRepeats(turned, (joint, path) =>
    note('RIG_NAME_TWICE', path, `${joint} already turns a link`, 'give each link a joint of its own'),
  );
  // Of joints that are malformed themselves, nobody can say which are missing.
  if (names.length !== joints.length) return;
  let last = -1;
  for (const { value: joint, path } of turned) {
    if (joint === undefined) continue;
    const at = names.indexOf(joint);
    if (at < 0) {
      const near = nearest(joint, names);
      const right = near === null ? `its joints are ${names.join(', ')}` : `did you mean ${near}?`;
      note('RIG_JOINT_UNKNOWN', path, `there is no joint ${joint}`, right);
    } else if (at < last) {
      const wrong = `the link of ${joint} comes after that of ${names[last]}, and its joint before`;
      note('RIG_LINK_ORDER', path, wrong, 'list joints and links from the base to the tip, both in one order');
    }
    last = Math.max(last, at);
  }
}

/** @param startMm where this joint's axis is on the link before; undefined where that is malformed */
function springRules({ spring, axis }: LooseLink, startMm: Vector | undefined, path: Path, note: Note): void {
  const { from_mm: from, to_mm: to } = spring ?? {};
  if (from === undefined || to === undefined || startMm === undefined) return;
  // Both ends from the joint's axis, at the zero pose.
  const held = minus(from, startMm);
  if (lengthMm(minus(held, to)) === 0) {
    const right = 'give from_mm on the link before and to_mm on this link, in millimetres at the zero pose';
    note('RIG_ARM', path, 'both ends of the spring are at one place', right);
    return;
  }
  const direction = axis === undefined ? null : axisOf(axis);
  if (direction === null || !direction.every(Number.isFinite)) return;
  for (const [key, end] of [
    ['from_mm', held],
    ['to_mm', to],
  ] as const) {
    if (lengthMm(cross(direction, end)) > NO_LEVER_MM) continue;
    const wrong = 'this end of the spring is on the joint’s axis, where it turns nothing';
    note('RIG_ARM', [...path, key], wrong, 'hold it away from the axis');
  }
}

function baseRules(base: NonNullable<Loose<Arm>['base']>, note: Note): void {
  const path = ['arm', 'base'];
  const { footprint_mm: corners, friction } = base;
  if (friction !== undefined && corners === undefined && !('footprint_mm' in base)) {
    const right =
      'give footprint_mm, the corners that stand on the floor: [[120, 120], [-120, 120], [-120, -120], [120, -120]]';
    note('RIG_TIPPING', [...path, 'friction'], 'friction without a footprint: tipping and sliding need both', right);
  }
  if (corners === undefined) return;
  if (base.mass_g === undefined && !('mass_g' in base)) {
    const right = 'give mass_g, the mass of the base in grams';
    note('RIG_TIPPING', [...path, 'footprint_mm'], 'a footprint without a mass: nothing holds the base down', right);
  }
  if (!isOutline(corners as readonly Corner[])) {
    const wrong = 'the corners of the footprint enclose nothing, or their outline crosses itself';
    note('RIG_TIPPING', [...path, 'footprint_mm'], wrong, 'list the corners [x, y] in order round, in millimetres');
  }
}

type Corner = readonly [number, number];

/** A closed outline that encloses an area and whose sides meet at corners only. */
function isOutline(corners: readonly Corner[]): boolean {
  const sides = corners.map((from, i) => [from, corners[(i + 1) % corners.length] ?? from] as const);
  const twiceArea = sides.reduce((sum, [a, b]) => sum + a[0] * b[1] - a[1] * b[0], 0);
  if (twiceArea === 0) return false;
  return sides.every(([a, b], i) => sides.slice(i + 2).every(([c, d]) => a === d || !cut(a, b, c, d)));
}

function cut(a: Corner, b: Corner, c: Corner, d: Corner): boolean {
  return side(a, b, c) * side(a, b, d) < 0 && side(c, d, a) * side(c, d, b) < 0;
}

/** On which side of the way from a to b a point lies. */
function side(a: Corner, b: Corner, point: Corner): number {
  return (b[0] - a[0]) * (point[1] - a[1]) - (b[1] - a[1]) * (point[0] - a[0]);
}

function minus(a: Vector, b: Vector): Vector {
  return [a[0] - b[0], a[1] - b[1], a[2] - b[2]];
}

function cross(a: Vector, b: Vector): Vector {
  return [a[1] * b[2] - a[2] * b[1], a[2] * b[0] - a[0] * b[2], a[0] * b[1] - a[1] * b[0]];
}
