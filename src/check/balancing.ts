import { balance, unloaded, withWeight, worstNm } from '../arm/balance.ts';
import type { Balanced, BalanceWish } from '../arm/balance.ts';
import { balancingSpring } from '../arm/balancing-spring.ts';
import { burden } from '../arm/burden.ts';
import type { JointBurden } from '../arm/burden.ts';
import { length } from '../arm/extent.ts';
import { loads } from '../arm/load.ts';
import type { ArmSpec, LinkSpec, Vec3 } from '../arm/spec.ts';
import type { Piece } from '../arm/stock.ts';
import { worst } from '../arm/worst.ts';
import { compileArm } from '../rig/compile-arm.ts';
import { compileLeader } from '../rig/compile-leader.ts';
import type { LoadedProfile } from '../rig/load.ts';
import type { Arm } from '../rig/schema/arm.ts';
import { degreesOf, gramsOf, metres, kilograms, millimetresOf, radians } from '../rig/units.ts';

/** An arm to be balanced: its geometry, and how far its joints turn, radians. */
export interface BalanceSubject {
  readonly profile: string;
  readonly arm: ArmSpec;
  readonly joints: readonly string[];
  readonly minRad: Float64Array;
  readonly maxRad: Float64Array;
  /** Acceleration that the profile asks of each joint, rad/s^2; null for a leader, which a hand moves. */
  readonly accelRadS2: readonly number[] | null;
}

/** How weights and springs are to be; lengths in millimetres, masses in grams. */
export interface BalanceOptions {
  /** Joints by name; null: all that have a link. */
  readonly only: readonly string[] | null;
  /** Distance of each weight from its axis, or its mass; null: where a weight is already, or 40 % of its link behind the axis. */
  readonly distanceMm: number | null;
  readonly massG: number | null;
  readonly stock: readonly Piece[] | null;
  readonly springFreeMm: number;
  /** How far above the axis, and along the link, springs are held; null: a quarter of the link. */
  readonly springAboveMm: number | null;
  readonly springAlongMm: number | null;
}

/** What balancing an arm takes, leaves and costs, in the units of files. Torques are the worst over all ranges. */
export interface BalanceReport {
  readonly profile: string;
  /** From the tip inward. */
  readonly joints: readonly BalancedJoint[];
  /** Joints that no weight helps. */
  readonly idle: readonly string[];
  readonly cost: BalanceCost;
}

export interface BalancedJoint {
  readonly joint: string;
  /** Null where no pieces of the stock are nearer than none. */
  readonly counterweight: { readonly mass_g: number; readonly at_mm: Vec3 } | null;
  /** Of the stock; null without one. */
  readonly pieces: readonly { readonly mass_g: number; readonly count: number }[] | null;
  /** Where exactly this mass balances best; null where there is none. */
  readonly exact_distance_mm: number | null;
  /** What no weight on this link can take: joints farther out and the payload move it. */
  readonly stray_nm: number;
  readonly before_nm: number;
  /** What is left, with the payload or without, whichever is worse. */
  readonly after_nm: number;
  readonly after_empty_nm: number;
  readonly after_full_nm: number;
  /** As a share of what the motor may hold; null without a motor. */
  readonly after_share: number | null;
  readonly after_pose_deg: readonly number[];
  /** A spring that would do instead; null where the axis is upright. */
  readonly spring: SpringInstead | null;
}

export interface SpringInstead {
  readonly n_per_mm: number;
  readonly free_mm: number;
  readonly from_mm: Vec3;
  readonly to_mm: Vec3;
  readonly after_nm: number;
  /** Whether its fixed end keeps its place above the axis in every pose: only then can a spring be exact. */
  readonly fixed: boolean;
}

/** Before and after. */
type Both = readonly [number, number];

export interface BalanceCost {
  /** All that turns: what the first bearing carries. */
  readonly moving_mass_g: Both;
  /** What holds the base down, standing still; null for one that is bolted. */
  readonly tipping_nm: Both | null;
  readonly joints: readonly {
    readonly joint: string;
    readonly inertia_kg_m2: Both;
    /** What its motor can still accelerate where load and inertia are greatest; null without a motor. */
    readonly accel_left_deg_s2: Both | null;
    readonly accel_deg_s2: number | null;
  }[];
}

/** Of a link's length, where nothing else says how far behind the axis a weight may stand. */
const BEHIND_SHARE = 0.4;
/** Of a link's length, how far from the axis the ends of a spring are held. */
const SPRING_SHARE = 0.25;

/** The arm of a profile; or the sentence that says what is missing. */
export function balanceSubject(loaded: LoadedProfile): BalanceSubject | string {
  const file = loaded.kind === 'leader' ? loaded.leader : loaded.follower;
  if (file.arm === undefined) return 'there is no arm: to balance; give its links with their masses';
  const massless = file.arm.links.find(({ mass_g }) => mass_g === undefined);
  if (massless !== undefined) return `the link of ${massless.joint} has no mass_g; weigh it, in grams`;
  const common = { arm: compileArm(file.arm, file.joints), joints: file.joints.map(({ name }) => name) };
  if (loaded.kind === 'follower') {
    const { follower, joints } = loaded.follower;
    return {
      ...common,
      profile: follower,
      minRad: Float64Array.from(joints, ({ range_deg }) => radians(range_deg[0])),
      maxRad: Float64Array.from(joints, ({ range_deg }) => radians(range_deg[1])),
      accelRadS2: joints.map(({ accel_deg_s2 }) => radians(accel_deg_s2)),
    };
  }
  const { name, joints } = compileLeader(loaded.leader);
  const ends = joints.map(({ map, travelMin, travelMax }) => [map.value(travelMin), map.value(travelMax)]);
  return {
    ...common,
    profile: name,
    minRad: Float64Array.from(ends, (pair) => Math.min(...pair)),
    maxRad: Float64Array.from(ends, (pair) => Math.max(...pair)),
    accelRadS2: null,
  };
}

export function balanceReport(subject: BalanceSubject, options: BalanceOptions): BalanceReport {
  const { profile, arm, joints, minRad, maxRad } = subject;
  const wished = arm.links.filter(({ joint }) => options.only?.includes(joints[joint] ?? '') ?? true);
  const balanced = balance(arm, {
    wishes: wished.map((link) => wishOf(link, options)),
    minRad,
    maxRad,
    stock: options.stock,
  });
  const bare = wished.reduce((so, link) => withWeight(so, arm.links.indexOf(link), null), arm);
  return {
    profile,
    joints: balanced.joints.map((one) => ({
      ...balancedJoint(one, balanced.spec, subject, options.stock),
      spring: springFor(one.joint, bare, subject, options),
    })),
    idle: balanced.idle.map((joint) => joints[joint] ?? ''),
    cost: costOf(subject, balanced.spec),
  };
}

function wishOf({ joint, toM, counterweight }: LinkSpec, { distanceMm, massG }: BalanceOptions): BalanceWish {
  if (massG !== null) return { joint, massKg: kilograms(massG) };
  if (distanceMm !== null) return { joint, distanceM: metres(distanceMm) };
  const there = counterweight === null ? 0 : length(counterweight.atM);
  return { joint, distanceM: there > 0 ? there : BEHIND_SHARE * longEnough(toM) };
}

/** A link without length still has room for a weight somewhere, metres. */
const SHORTEST_M = 0.02;

function longEnough(toM: Vec3): number {
  return Math.max(length(toM), SHORTEST_M);
}

function balancedJoint(
  { joint, counterweight, taken, exactDistanceM, strayNm, before, after }: Balanced,
  spec: ArmSpec,
  { joints, minRad, maxRad }: BalanceSubject,
  stock: readonly Piece[] | null,
): Omit<BalancedJoint, 'spring'> {
  const { motor } = spec.links.find((link) => link.joint === joint) as LinkSpec;
  const empty = worstNm(unloaded(spec), joint, minRad, maxRad).value;
  return {
    joint: joints[joint] ?? '',
    counterweight:
      counterweight.massKg === 0
        ? null
        : { mass_g: weighable(gramsOf(counterweight.massKg)), at_mm: measurable(counterweight.atM) },
    pieces:
      taken === null || stock === null
        ? null
        : stock.flatMap(({ massKg }, i) => {
            const count = taken.counts[i] ?? 0;
            return count === 0 ? [] : [{ mass_g: gramsOf(massKg), count }];
          }),
    exact_distance_mm: Number.isFinite(exactDistanceM) ? millimetresOf(exactDistanceM) : null,
    stray_nm: strayNm,
    before_nm: before.value,
    after_nm: after.value,
    after_empty_nm: empty,
    after_full_nm: spec.payload === null ? empty : fullNm(spec, joint, minRad, maxRad),
    after_share: motor === null ? null : after.value / (motor.stallNm * motor.holdUse),
    after_pose_deg: [...after.poseRad].map(degreesOf),
  };
}

/** Worst torque with the whole payload. */
function fullNm(spec: ArmSpec, joint: number, minRad: Float64Array, maxRad: Float64Array): number {
  const { torqueNm } = loads(spec, minRad.length);
  const torque = new Float64Array(minRad.length);
  const joints = spec.links.map((link) => link.joint);
  return worst({ minRad, maxRad, joints }, (pose) => {
    torqueNm(pose, torque);
    return Math.abs(torque[joint] as number);
  }).value;
}

function springFor(
  joint: number,
  bare: ArmSpec,
  { minRad, maxRad }: BalanceSubject,
  { springFreeMm, springAboveMm, springAlongMm }: BalanceOptions,
): SpringInstead | null {
  const link = bare.links.find((one) => one.joint === joint) as LinkSpec;
  const quarter = SPRING_SHARE * longEnough(link.toM);
  const found = balancingSpring(bare, {
    joint,
    aboveM: springAboveMm === null ? quarter : metres(springAboveMm),
    alongM: springAlongMm === null ? quarter : metres(springAlongMm),
    freeM: metres(springFreeMm),
    minRad,
    maxRad,
  });
  if (found === null) return null;
  const { nPerM, freeM, fromM, toM } = found.spring;
  return {
    n_per_mm: weighable(nPerM * metres(1)),
    free_mm: millimetresOf(freeM),
    from_mm: measurable(fromM),
    to_mm: measurable(toM),
    after_nm: found.after.value,
    fixed: found.fixed,
  };
}

function costOf({ arm, joints, minRad, maxRad, accelRadS2 }: BalanceSubject, balanced: ArmSpec): BalanceCost {
  const [before, after] = [burden(arm, minRad, maxRad), burden(balanced, minRad, maxRad)];
  return {
    moving_mass_g: [gramsOf(before.movingKg), gramsOf(after.movingKg)],
    tipping_nm: before.tippingNm === null || after.tippingNm === null ? null : [before.tippingNm, after.tippingNm],
    joints: before.joints.map((was, i) => {
      const is = after.joints[i] ?? was;
      const left = [was, is].map(accelLeft);
      const accel = accelRadS2?.[was.joint] ?? null;
      return {
        joint: joints[was.joint] ?? '',
        inertia_kg_m2: [was.inertiaKgM2, is.inertiaKgM2],
        accel_left_deg_s2: left.every((one) => one !== null) ? (left as unknown as Both) : null,
        accel_deg_s2: accel === null ? null : degreesOf(accel),
      };
    }),
  };
}

/** A joint that turns nothing but itself can speed up as it likes. */
const NO_INERTIA_KGM2 = 1e-9;

function accelLeft({ inertiaKgM2, accelLeftRadS2 }: JointBurden): number | null {
  return accelLeftRadS2 === null || inertiaKgM2 < NO_INERTIA_KGM2 ? null : degreesOf(accelLeftRadS2);
}

/** To four digits: no scale in a workshop tells more. */
function weighable(value: number): number {
  return Number(value.toPrecision(4));
}

/** To a tenth of a millimetre. */
function measurable([x, y, z]: Vec3): Vec3 {
  const tenth = (value: number): number => Math.round(10 * millimetresOf(value)) / 10 || 0;
  return [tenth(x), tenth(y), tenth(z)];
}

/** Where in its file a link stands. */
export function linkIndex(arm: Arm, joint: string): number {
  return arm.links.findIndex((link) => link.joint === joint);
}
