import fc from 'fast-check';
import { chain } from '../../src/arm/chain.ts';
import type { ArmSpec, BaseSpec, LinkSpec, Vec3 } from '../../src/arm/spec.ts';

/** Arms built by hand, in metres, kilograms and radians. */

export const DEG = Math.PI / 180;
export const X: Vec3 = [1, 0, 0];
export const Y: Vec3 = [0, 1, 0];
export const Z: Vec3 = [0, 0, 1];

/** A link without mass, unless `changes` say otherwise. */
export function link(joint: number, axis: Vec3, toM: Vec3, changes: Partial<LinkSpec> = {}): LinkSpec {
  return {
    joint,
    axis,
    toM,
    massKg: 0,
    centreM: [toM[0] / 2, toM[1] / 2, toM[2] / 2],
    counterweight: null,
    spring: null,
    motor: null,
    dragNm: 0,
    cable: null,
    ...changes,
  };
}

/** An arm whose first axis is at the origin and stands upright, unless `base` says otherwise. */
export function arm(
  links: readonly LinkSpec[],
  base: Partial<BaseSpec> = {},
  payload: ArmSpec['payload'] = null,
): ArmSpec {
  return {
    base: { heightM: 0, tiltRad: [0, 0], massKg: null, footprintM: null, friction: null, ...base },
    links,
    payload,
  };
}

/** A bird of 0.6 m like those on the stage: base, shoulder, elbow, nod, and a twist that does not move the tip. */
export function bird(): ArmSpec {
  return arm([
    link(0, Z, [0, 0, 0.04], { massKg: 0.25 }),
    link(1, Y, [0, 0, 0.28], { massKg: 0.18 }),
    link(2, Y, [0, 0, 0.2], { massKg: 0.12 }),
    link(3, Y, [0, 0, 0.05], { massKg: 0.06 }),
    link(4, Z, [0, 0, 0.03], { massKg: 0.04 }),
  ]);
}

/** Links in the plane of x and z that turn from x to z: about -y. */
export function planar(lengthsM: readonly number[], changes: readonly Partial<LinkSpec>[] = []): ArmSpec {
  return arm(lengthsM.map((length, i) => link(i, [0, -1, 0], [length, 0, 0], changes[i])));
}

export function tipAt(spec: ArmSpec, anglesRad: ArrayLike<number>): number[] {
  const poser = chain(spec);
  poser.pose(Float64Array.from(anglesRad));
  return [...poser.at.subarray(3 * poser.links)];
}

export function distance(a: ArrayLike<number>, b: ArrayLike<number>): number {
  return Math.hypot(...Array.from(a, (value, k) => value - (b[k] as number)));
}

const finite = (min: number, max: number): fc.Arbitrary<number> =>
  fc.double({ min, max, noNaN: true, noDefaultInfinity: true });

/** Angles of `joints` joints. */
export const angles = (joints: number, most: number): fc.Arbitrary<Float64Array> =>
  fc.array(finite(-most, most), { minLength: joints, maxLength: joints }).map((list) => Float64Array.from(list));

const axis: fc.Arbitrary<Vec3> = fc.oneof(
  fc.constantFrom(X, Y, Z),
  fc.tuple(finite(-Math.PI, Math.PI), finite(-1, 1)).map(([around, up]): Vec3 => {
    const out = Math.sqrt(1 - up * up);
    return [out * Math.cos(around), out * Math.sin(around), up];
  }),
);

const vector = (most: number): fc.Arbitrary<Vec3> =>
  fc.tuple(finite(-most, most), finite(-most, most), finite(-most, most));

/** Any serial arm that a file can describe, masses and all. */
export const anyArm: fc.Arbitrary<ArmSpec> = fc
  .record({
    links: fc.array(
      fc.record({
        axis,
        toM: vector(0.5),
        massKg: finite(0, 2),
        centreM: vector(0.3),
        counterweight: fc.option(fc.record({ massKg: finite(0.01, 2), atM: vector(0.3) })),
      }),
      { minLength: 1, maxLength: 8 },
    ),
    heightM: finite(0, 3),
    tiltRad: fc.tuple(finite(-Math.PI, Math.PI), finite(-Math.PI, Math.PI)),
    payload: fc.option(fc.record({ massKg: finite(0.01, 1), atM: vector(0.2) })),
  })
  .map(({ links, heightM, tiltRad, payload }) =>
    arm(
      links.map(({ axis: about, toM, ...rest }, joint) => link(joint, about, toM, rest)),
      { heightM, tiltRad },
      payload,
    ),
  );

/** Arms as they are built: a base that turns, then joints that bend, then perhaps one that twists. */
export const builtArm: fc.Arbitrary<ArmSpec> = fc
  .record({
    bends: fc.array(fc.tuple(fc.constantFrom(X, Y), finite(0.1, 0.6)), { minLength: 2, maxLength: 5 }),
    columnM: finite(0, 0.3),
    heightM: finite(0, 1),
    hung: fc.boolean(),
  })
  .map(({ bends, columnM, heightM, hung }) =>
    arm([link(0, Z, [0, 0, columnM]), ...bends.map(([about, length], i) => link(i + 1, about, [0, 0, length]))], {
      heightM: hung ? 3 + heightM : heightM,
      tiltRad: [hung ? Math.PI : 0, 0],
    }),
  );

export { finite };
