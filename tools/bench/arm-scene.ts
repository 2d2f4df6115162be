import type { ArmSpec, LinkSpec, Vec3 } from '../../src/arm/spec.ts';
import { followers, type Follower } from '../../src/follower/follower.ts';
import type { FollowerSpec, WholeArmSpec } from '../../src/follower/spec.ts';
import { compileMap } from '../../src/map/compile.ts';

/** An arm of six joints and the followers that are such arms: what the kernels of `arm/` are timed on. Invented data. */

export const JOINTS = 6;
export const RATE_HZ = 200;

const X: Vec3 = [1, 0, 0];
const Y: Vec3 = [0, 1, 0];
const Z: Vec3 = [0, 0, 1];

function link(joint: number, axis: Vec3, toM: Vec3, massKg: number, stallNm: number): LinkSpec {
  const [x, y, z] = toM;
  return {
    joint,
    axis,
    toM,
    massKg,
    centreM: [x / 2, y / 2, z / 2],
    counterweight: null,
    spring: null,
    motor: { stallNm, use: 0.5, holdUse: 0.3, stallA: 2 },
    dragNm: 0.01,
    cable: null,
  };
}

export const SIX: ArmSpec = {
  base: { heightM: 0.1, tiltRad: [0, 0], massKg: 4, footprintM: null, friction: null },
  links: [
    link(0, Z, [0, 0, 0.06], 0.25, 6),
    link(1, Y, [0, 0, 0.28], 0.2, 12),
    link(2, Y, [0, 0, 0.22], 0.12, 8),
    link(3, X, [0, 0, 0.05], 0.06, 3),
    link(4, Y, [0, 0, 0.04], 0.04, 2),
    link(5, Z, [0.02, 0, 0.03], 0.03, 1),
  ],
  payload: { massKg: 0.05, atM: [0, 0, 0.02] },
};

/** Instants of the scene, half a command apart, before it begins again. */
const INSTANTS = 8_192;
const HALF_S = 0.5 / RATE_HZ;

/** What happens at every instant, worked out beforehand: the meter is to time the kernels, not sines. */
export interface Course {
  /** out = the values at command k, or half a command later. */
  at(k: number, later: boolean, out: Float64Array): void;
}

function course(values: number, value: (tS: number, i: number) => number): Course {
  const table = new Float64Array(INSTANTS * values);
  for (let n = 0; n < INSTANTS; n++) for (let i = 0; i < values; i++) table[n * values + i] = value(n * HALF_S, i);
  return {
    at(k, later, out) {
      const from = ((2 * k + (later ? 1 : 0)) % INSTANTS) * values;
      for (let i = 0; i < values; i++) out[i] = table[from + i] as number;
    },
  };
}

/** One round of the course, radians a second: everything comes back to where it began without a jump. */
const ROUND_RAD_S = (2 * Math.PI) / (INSTANTS * HALF_S);

/** The hand goes over most of its travel in some seconds, as hands do. */
export const hand = (): Course =>
  course(JOINTS, (tS, j) => 0.35 + 0.45 * Math.sin((4 + (j % 3)) * ROUND_RAD_S * tS + 0.9 * j));

/** A place of the tip that goes round inside the arm's reach. */
export const target = (): Course =>
  course(3, (tS, k) => ([0.3, 0, 0.35][k] as number) + 0.12 * Math.sin((4 + k) * ROUND_RAD_S * tS));

/** Tip following, 250 mm/s at every link end, a floor and a lamp stand, loads and accelerations limited. */
const WHOLE: WholeArmSpec = {
  arm: SIX,
  endSpeedMS: 0.25,
  keepOut: [
    { kind: 'below', zM: 0 },
    { kind: 'box', minM: [0.45, -0.3, 0], maxM: [0.6, -0.2, 0.5] },
  ],
  limitLoad: true,
  limitAccel: false,
  tip: {
    leader: { ...SIX, links: SIX.links.map((one) => ({ ...one, toM: one.toM.map((v) => v / 4) as unknown as Vec3 })) },
    scale: 4,
    originM: [0, 0, 0],
    mirror: false,
    turnRad: 0,
    keepPitch: false,
    reaching: [0, 1, 2, 3, 4, 5],
  },
};

export function tipFollowers(count: number): readonly Follower[] {
  const rad = Math.PI / 180;
  const map = compileMap(
    [
      [-100 * rad, 500],
      [100 * rad, 2_500],
    ],
    'straight',
    'clamp',
  );
  const spec: FollowerSpec = {
    name: 'six',
    periodUs: 1e6 / RATE_HZ,
    joints: Array.from({ length: JOINTS }, (_, j) => ({
      name: `j${j}`,
      sources: [{ joint: j, weight: 1 }],
      gain: 1,
      offsetRad: 0,
      minRad: -100 * rad,
      maxRad: 100 * rad,
      deadbandRad: 0.2 * rad,
      speedRadS: 90 * rad,
      accelRadS2: 360 * rad,
      restRad: 20 * rad,
    })),
    servos: Array.from({ length: JOINTS }, (_, j) => ({
      channel: j,
      turns: [{ joint: j, weight: 1 }],
      map,
      deadbandUs: 4,
    })),
    joinShare: 0.25,
    joinMeet: 'move',
    wake: 'rest',
    stopCategory: 2,
    hasPower: false,
    onLostPulse: 'limp',
    poses: new Map(),
    whole: WHOLE,
  };
  return followers(Array.from({ length: count }, (_, f) => ({ ...spec, name: `six${f}` })));
}
