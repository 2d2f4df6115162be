import type { ArmSpec, LinkSpec, Vec3 } from '../../src/arm/spec.ts';

/** A link that weighs nothing: drawings know no masses. */
export function link(joint: number, axis: Vec3, toM: Vec3): LinkSpec {
  return {
    joint,
    axis,
    toM,
    massKg: 0,
    centreM: [0, 0, 0],
    counterweight: null,
    spring: null,
    motor: null,
    dragNm: 0,
    cable: null,
  };
}

export const Y: Vec3 = [0, 1, 0];
export const Z: Vec3 = [0, 0, 1];

export function arm(links: readonly LinkSpec[], base: Partial<ArmSpec['base']> = {}): ArmSpec {
  return {
    base: { heightM: 0, tiltRad: [0, 0], massKg: null, footprintM: null, friction: null, ...base },
    links,
    payload: null,
  };
}

export const range = (minDeg: number, maxDeg: number) => ({
  minRad: (minDeg * Math.PI) / 180,
  maxRad: (maxDeg * Math.PI) / 180,
});
