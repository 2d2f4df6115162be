import { chain } from '../../arm/chain.ts';
import { keepOuts } from '../../arm/keep-outs.ts';
import { loads } from '../../arm/load.ts';
import { reaching } from '../../arm/reaching.ts';
import type { ArmSpec } from '../../arm/spec.ts';
import { compileArm, compileKeepOut } from '../compile-arm.ts';
import type { Path } from '../located.ts';
import { lengthMm } from '../reach.ts';
import type { Vector } from '../reach.ts';
import type { FollowerProfile } from '../schema/follower.ts';
import type { Loose } from '../shape.ts';
import { radians } from '../units.ts';
import type { Note } from './note.ts';

type LooseFollower = Loose<FollowerProfile>;

const EXAMPLE = 'arm: { links: [{ joint: shoulder, axis: y, to_mm: [0, 0, 280] }] }';

/** What asks for the arm's geometry has it. */
export function geometryRules(follower: LooseFollower, note: Note): void {
  keepOutRule(follower, note);
  if ('arm' in follower) {
    motorRule(follower, note);
    return;
  }
  const asked: readonly (readonly [boolean, string, string])[] = [
    [follower.follow === 'tip', 'follow', 'follow: tip'],
    [follower.tip_speed_mm_s !== undefined, 'tip_speed_mm_s', 'tip_speed_mm_s'],
    [(follower.keep_out ?? []).length > 0, 'keep_out', 'keep_out'],
    [follower.load === 'limit', 'load', 'load: limit'],
    [follower.moving_load === 'limit', 'moving_load', 'moving_load: limit'],
  ];
  for (const [is, key, what] of asked) {
    if (is) note('RIG_ARM_MISSING', [key], `${what} needs the arm's geometry`, `give its links, such as ${EXAMPLE}`);
  }
}

/** A load can only be over something. */
function motorRule({ arm, load, moving_load }: LooseFollower, note: Note): void {
  const links = arm?.links;
  if (links === undefined || links.some((link) => 'motor' in link)) return;
  for (const [key, value] of [
    ['load', load],
    ['moving_load', moving_load],
  ] as const) {
    if (value !== 'limit') continue;
    const right = 'give links their motor: { stall_nm: 6 }, from the data sheet';
    note('RIG_MOTOR_MISSING', [key], `${key}: limit without any motor limits nothing`, right);
  }
}

function keepOutRule({ keep_out: places = [] }: LooseFollower, note: Note): void {
  for (const [i, place] of places.entries()) {
    if (!('box_mm' in place) || place.box_mm === undefined) continue;
    const [low, high] = place.box_mm as readonly [Vector, Vector];
    if (low.every((value, axis) => value < (high[axis] ?? value))) continue;
    const wrong = 'the first corner of the box is not the lower one on every axis';
    const right = 'write [[lowest x, y, z], [highest x, y, z]], in millimetres';
    note('RIG_SPAN_ORDER', ['keep_out', i, 'box_mm'], wrong, right);
  }
}

/** What a well-formed arm can be held against: where its poses stand, and whether it can follow a tip. */
export function poseRules(follower: FollowerProfile, note: Note): void {
  const { arm: geometry, joints } = follower;
  if (geometry === undefined || !isArm(geometry, joints)) return;
  const arm = compileArm(geometry, joints);
  const ranges = joints.map(({ range_deg: [low, high] }) => ({ minRad: radians(low), maxRad: radians(high) }));
  if (follower.follow === 'tip' && reaching(arm, ranges).length === 0) {
    const right = 'give links to the joints that reach, or use follow: joints';
    note('RIG_TIP_STILL', ['follow'], 'follow: tip, and no joint of this arm moves its tip', right);
  }
  overloadRule(follower, arm, note);
  const poser = chain(arm);
  const places = keepOuts(follower.keep_out.map(compileKeepOut));
  const clear = new Float64Array(1);
  for (const { name, path, anglesDeg } of posesOf(follower)) {
    if (!places.some) break;
    poser.pose(Float64Array.from(anglesDeg, radians));
    places.clearance(poser, clear);
    const deepMm = -1000 * (clear[0] ?? 0);
    if (deepMm <= 0) continue;
    const wrong = `${name} is inside a keep-out, by ${Math.max(1, Math.round(deepMm))} mm`;
    note('RIG_POSE_KEPT_OUT', path, wrong, 'move the pose or the keep-out; both are in the base’s level frame');
  }
}

/** An arm that refuses loads could never leave, nor reach, a rest pose that is over its own. */
function overloadRule({ load, joints }: FollowerProfile, arm: ArmSpec, note: Note): void {
  if (load !== 'limit') return;
  const shares = new Float64Array(joints.length);
  loads(arm, joints.length).worst(
    Float64Array.from(joints, ({ rest_deg }) => radians(rest_deg)),
    shares,
  );
  for (const [i, { name }] of joints.entries()) {
    const percent = Math.round(100 * (shares[i] ?? Number.NaN));
    if (!(percent > 100)) continue;
    const wrong = `the rest pose loads ${name} to ${percent} % of what its motor may give, and load: limit allows 100`;
    note(
      'RIG_REST_OVERLOAD',
      ['joints', i, 'rest_deg'],
      wrong,
      'rest lower, balance the arm, or give it a stronger motor',
    );
  }
}

interface NamedPose {
  readonly name: string;
  readonly path: Path;
  /** In joint order. */
  readonly anglesDeg: readonly number[];
}

/** The rest pose first. */
function posesOf({ joints, poses }: FollowerProfile): readonly NamedPose[] {
  const rest = { name: 'the rest pose', path: ['joints'], anglesDeg: joints.map(({ rest_deg }) => rest_deg) };
  const named = Object.entries(poses).map(([pose, angles]) => ({
    name: `the pose ${pose}`,
    path: ['poses', pose],
    anglesDeg: joints.map(({ name, rest_deg }) => angles[name] ?? rest_deg),
  }));
  return [rest, ...named];
}

/** Whether the other rules left an arm that can be posed. */
function isArm({ links }: NonNullable<FollowerProfile['arm']>, joints: FollowerProfile['joints']): boolean {
  const names = new Set(joints.map(({ name }) => name));
  return (
    links.every(({ joint, axis }) => names.has(joint) && (typeof axis === 'string' || lengthMm(axis) > 0)) &&
    links.some(({ to_mm }) => lengthMm(to_mm) > 0)
  );
}
