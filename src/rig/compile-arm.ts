import { reachM } from '../arm/extent.ts';
import type { ArmSpec, BaseSpec, KeepOut, LinkSpec, SpringSpec, Vec3 } from '../arm/spec.ts';
import type { FollowerJointSpec, TipSpec, WholeArmSpec } from '../follower/spec.ts';
import { reaching } from '../arm/reaching.ts';
import type { Arm } from './schema/arm.ts';
import type { FollowerProfile } from './schema/follower.ts';
import { kilograms, metres, radians } from './units.ts';

type Link = Arm['links'][number];

const AXES: Readonly<Record<'x' | 'y' | 'z', Vec3>> = { x: [1, 0, 0], y: [0, 1, 0], z: [0, 0, 1] };

/** The geometry and masses of a file without mistakes, in metres, kilograms and radians. */
export function compileArm(arm: Arm, joints: readonly { readonly name: string }[]): ArmSpec {
  const names = joints.map(({ name }) => name);
  return {
    base: compileBase(arm.base),
    links: arm.links.map((link) => compileLink(link, names)),
    payload:
      arm.payload === undefined ? null : { massKg: kilograms(arm.payload.mass_g), atM: metresOf(arm.payload.at_mm) },
  };
}

/**
 * What a follower has to keep as a whole arm; null where its file gives no geometry.
 * @param leader the leader's geometry; null where its file gives none
 */
export function compileWhole(
  profile: FollowerProfile,
  joints: readonly FollowerJointSpec[],
  leader: ArmSpec | null,
): WholeArmSpec | null {
  if (profile.arm === undefined) return null;
  const arm = compileArm(profile.arm, profile.joints);
  return {
    arm,
    endSpeedMS: profile.tip_speed_mm_s === undefined ? null : metres(profile.tip_speed_mm_s),
    keepOut: profile.keep_out.map(compileKeepOut),
    limitLoad: profile.load === 'limit',
    limitAccel: profile.moving_load === 'limit',
    tip: profile.follow === 'tip' ? compileTip(profile, arm, joints, leader) : null,
  };
}

function compileTip(
  { tip }: FollowerProfile,
  arm: ArmSpec,
  joints: readonly FollowerJointSpec[],
  leader: ArmSpec | null,
): TipSpec {
  if (leader === null) throw new Error('follow: tip passed the rules without the leader’s arm');
  return {
    leader,
    scale: tip?.scale ?? reachM(arm) / reachM(leader),
    originM: metresOf(tip?.origin_mm ?? [0, 0, 0]),
    mirror: tip?.mirror ?? false,
    turnRad: radians(tip?.turn_deg ?? 0),
    keepPitch: tip?.keep_pitch ?? false,
    reaching: reaching(arm, joints),
  };
}

function compileBase({ height_mm, tilt_deg, mass_g, footprint_mm, friction }: Arm['base']): BaseSpec {
  return {
    heightM: metres(height_mm),
    tiltRad: [radians(tilt_deg[0]), radians(tilt_deg[1])],
    massKg: mass_g === undefined ? null : kilograms(mass_g),
    footprintM: footprint_mm?.map(([x, y]) => [metres(x), metres(y)] as const) ?? null,
    friction: friction ?? null,
  };
}

function compileLink(link: Link, names: readonly string[]): LinkSpec {
  const joint = names.indexOf(link.joint);
  if (joint < 0) throw new Error(`link of ${link.joint} passed the rules unknown`);
  const { counterweight, spring, motor, cable } = link;
  const toM = metresOf(link.to_mm);
  return {
    joint,
    axis: axisOf(link.axis),
    toM,
    massKg: link.mass_g === undefined ? 0 : kilograms(link.mass_g),
    centreM: link.centre_mm === undefined ? [toM[0] / 2, toM[1] / 2, toM[2] / 2] : metresOf(link.centre_mm),
    counterweight:
      counterweight === undefined
        ? null
        : { massKg: kilograms(counterweight.mass_g), atM: metresOf(counterweight.at_mm) },
    spring: spring === undefined ? null : compileSpring(spring),
    motor:
      motor === undefined
        ? null
        : { stallNm: motor.stall_nm, use: motor.use, holdUse: motor.hold_use, stallA: motor.stall_a ?? null },
    dragNm: link.drag_nm,
    cable: cable === undefined ? null : { nmPerRad: cable.nm_per_deg / radians(1), freeRad: radians(cable.free_deg) },
  };
}

/** A direction need not have length one: it is written by hand. */
export function axisOf(axis: Link['axis']): Vec3 {
  if (typeof axis === 'string') return AXES[axis];
  const length = Math.hypot(...axis);
  return [axis[0] / length, axis[1] / length, axis[2] / length];
}

function compileSpring({ n_per_mm, free_mm, from_mm, to_mm }: NonNullable<Link['spring']>): SpringSpec {
  return { nPerM: n_per_mm / metres(1), freeM: metres(free_mm), fromM: metresOf(from_mm), toM: metresOf(to_mm) };
}

/**
 * A place no link may enter, in metres, larger by its clearance. Links are lines here: one whose line stays out of a box
 * that is larger by r on every side has no part nearer than r to the box, corners included.
 */
export function compileKeepOut(place: FollowerProfile['keep_out'][number]): KeepOut {
  const further = metres(place.clearance_mm);
  if ('below_mm' in place) return { kind: 'below', zM: metres(place.below_mm) + further };
  const [low, high] = place.box_mm;
  const [x, y, z] = metresOf(low);
  const [toX, toY, toZ] = metresOf(high);
  return {
    kind: 'box',
    minM: [x - further, y - further, z - further],
    maxM: [toX + further, toY + further, toZ + further],
  };
}

function metresOf(vector: Vec3): Vec3 {
  return [metres(vector[0]), metres(vector[1]), metres(vector[2])];
}
