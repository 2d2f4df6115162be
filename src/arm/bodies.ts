import type { ArmSpec, LinkSpec, MassSpec, Vec3 } from './spec.ts';

/** Standard acceleration of free fall, m/s^2: resolution 2 of the 3rd CGPM, 1901. */
export const GRAVITY_MS2 = 9.80665;

/** What each link and all that is fixed to it (counterweight, payload) weigh, as one rigid body a link. */
export interface Bodies {
  /** One value a link, kilograms. */
  readonly massKg: Float64Array;
  /** First moment of mass about the link's start, in its own frame, kilogram metres; 3 values a link. */
  readonly momentKgM: Float64Array;
  /** Inertia about the link's start, in its own frame, kilogram square metres; 9 values a link, row by row. */
  readonly inertiaKgM2: Float64Array;
}

/**
 * How a link's own mass lies about its centre. A rod: slender, as long as the link and along it, m L^2 / 12 across.
 * A point: nothing about the centre. Or known: 9 values about the centre in the link's frame, row by row.
 */
export type LinkInertia = 'rod' | 'point' | readonly number[];

/** A point mass and the link it turns with, in that link's frame. */
export interface PointMass extends MassSpec {
  readonly link: number;
}

/** Every link's own mass at its centre, counterweights, and the payload. */
export function pointMasses(spec: ArmSpec): readonly PointMass[] {
  const masses = spec.links.flatMap(({ massKg, centreM, counterweight }, link): PointMass[] => {
    const own = { link, massKg, atM: centreM };
    return counterweight === null ? [own] : [own, { link, ...counterweight }];
  });
  const last = spec.links.at(-1);
  if (spec.payload === null || last === undefined) return masses;
  const [x, y, z] = spec.payload.atM;
  const atM: Vec3 = [last.toM[0] + x, last.toM[1] + y, last.toM[2] + z];
  return [...masses, { link: spec.links.length - 1, massKg: spec.payload.massKg, atM }];
}

/** @param inertia of each link; absent: rods */
export function bodies(spec: ArmSpec, inertia: readonly LinkInertia[] = []): Bodies {
  const n = spec.links.length;
  const all: Bodies = {
    massKg: new Float64Array(n),
    momentKgM: new Float64Array(3 * n),
    inertiaKgM2: new Float64Array(9 * n),
  };
  for (const { link, massKg, atM } of pointMasses(spec)) addPoint(all, link, massKg, atM);
  spec.links.forEach((link, i) => addAboutCentre(all, i, link, inertia[i] ?? 'rod'));
  return all;
}

function addPoint({ massKg, momentKgM, inertiaKgM2 }: Bodies, i: number, kg: number, at: Vec3): void {
  massKg[i] = (massKg[i] as number) + kg;
  for (let r = 0; r < 3; r++) momentKgM[3 * i + r] = (momentKgM[3 * i + r] as number) + kg * (at[r] as number);
  addTurning(inertiaKgM2, i, kg, at);
}

/** Adds share (|v|^2 - v v'), the inertia of a point mass `share` at v. */
function addTurning(inertia: Float64Array, i: number, share: number, v: Vec3): void {
  const square = v[0] ** 2 + v[1] ** 2 + v[2] ** 2;
  for (let r = 0; r < 3; r++) {
    for (let c = 0; c < 3; c++) {
      const k = 9 * i + 3 * r + c;
      inertia[k] = (inertia[k] as number) + share * ((r === c ? square : 0) - (v[r] as number) * (v[c] as number));
    }
  }
}

function addAboutCentre({ inertiaKgM2 }: Bodies, i: number, { massKg, toM }: LinkSpec, inertia: LinkInertia): void {
  if (inertia === 'rod') addTurning(inertiaKgM2, i, massKg / 12, toM);
  else if (inertia !== 'point') {
    for (let k = 0; k < 9; k++) inertiaKgM2[9 * i + k] = (inertiaKgM2[9 * i + k] as number) + (inertia[k] as number);
  }
}
