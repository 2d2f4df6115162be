import rapier from '@dimforge/rapier3d-compat';
import { beforeAll, describe, expect, it } from 'vitest';
import { bodies } from '../../src/arm/bodies.ts';
import { loads } from '../../src/arm/load.ts';
import type { ArmSpec, Vec3 } from '../../src/arm/spec.ts';
import { arm, link, X, Y, Z } from '../arm/arms.ts';
import { swing } from '../arm/swing.ts';

/**
 * The same arm in a general-purpose physics engine, @dimforge/rapier3d-compat (Apache-2.0): rigid bodies on revolute joints,
 * in single precision. The engine is told masses, places and g; torques and motion are its own.
 */

/** Bent at the zero pose, so that gravity pulls at every joint there; links are rods, with a payload. */
const bent: ArmSpec = arm(
  [
    link(0, Z, [0.1, 0, 0.2], { massKg: 1.1 }),
    link(1, Y, [0.25, 0.05, 0.1], { massKg: 0.8, counterweight: { massKg: 0.6, atM: [-0.1, 0, -0.02] } }),
    link(2, X, [0.1, 0.15, -0.05], { massKg: 0.4 }),
    link(3, Y, [0.12, 0, 0.03], { massKg: 0.2 }),
  ],
  { tiltRad: [0, 0], heightM: 0.3 },
  { massKg: 0.15, atM: [0.02, 0, 0] },
);

/** Its joints in reduced coordinates do not give way but damp every motion; those it solves as constraints, the reverse. */
type Joints = 'unyielding' | 'undamped';
/** Rounds that solve the constraints: more make them stiffer. */
const SOLVER_ITERATIONS = 40;

type World = ReturnType<typeof build>;

const vector = ([x, y, z]: readonly number[]): { x: number; y: number; z: number } => ({
  x: x as number,
  y: y as number,
  z: z as number,
});

/** Principal axes by Jacobi's turns: the engine wants moments along axes and the axes' orientation. */
function principal(inertia: readonly number[]): {
  moments: Vec3;
  frame: { x: number; y: number; z: number; w: number };
} {
  const a = [0, 1, 2].map((r) => [0, 1, 2].map((c) => inertia[3 * r + c] as number));
  let q = [0, 0, 0, 1];
  for (let sweep = 0; sweep < 60; sweep++) {
    const [p, s] = (
      [
        [0, 1],
        [1, 2],
        [0, 2],
      ] as const
    )[sweep % 3] as readonly [number, number];
    const off = a[p]?.[s] as number;
    const angle = off === 0 ? 0 : 0.5 * Math.atan2(2 * off, (a[s]?.[s] as number) - (a[p]?.[p] as number));
    const rotation = [0, 1, 2].map((r) => [0, 1, 2].map((c) => (r === c ? 1 : 0)));
    const [cos, sin] = [Math.cos(angle), Math.sin(angle)];
    Object.assign(rotation[p] as number[], { [p]: cos, [s]: sin });
    Object.assign(rotation[s] as number[], { [p]: -sin, [s]: cos });
    const product = (m: number[][], n: number[][]): number[][] =>
      m.map((row) => [0, 1, 2].map((c) => row.reduce((sum, v, k) => sum + v * (n[k]?.[c] as number), 0)));
    const transposed = rotation.map((row, r) => row.map((_, c) => rotation[c]?.[r] as number));
    const next = product(product(transposed, a), rotation);
    for (const r of [0, 1, 2]) a[r] = next[r] as number[];
    // The column's turn as a quaternion about the third axis, composed on the right.
    const axis = 3 - p - s;
    const sign = (s - p + 3) % 3 === 1 ? -1 : 1;
    const half = [0, 0, 0, Math.cos(angle / 2)];
    half[axis] = sign * Math.sin(angle / 2);
    const [x1, y1, z1, w1] = q as [number, number, number, number];
    const [x2, y2, z2, w2] = half as [number, number, number, number];
    q = [
      w1 * x2 + x1 * w2 + y1 * z2 - z1 * y2,
      w1 * y2 - x1 * z2 + y1 * w2 + z1 * x2,
      w1 * z2 + x1 * y2 - y1 * x2 + z1 * w2,
      w1 * w2 - x1 * x2 - y1 * y2 - z1 * z2,
    ];
  }
  const [x, y, z, w] = q as [number, number, number, number];
  return { moments: [a[0]?.[0] as number, a[1]?.[1] as number, a[2]?.[2] as number], frame: { x, y, z, w } };
}

function build(spec: ArmSpec, dtS: number, joints: Joints) {
  const world = new rapier.World({ x: 0, y: 0, z: -9.80665 });
  world.timestep = dtS;
  world.integrationParameters.numSolverIterations = SOLVER_ITERATIONS;
  const { massKg, momentKgM, inertiaKgM2 } = bodies(spec);
  let place: Vec3 = [0, 0, spec.base.heightM];
  let before = world.createRigidBody(rapier.RigidBodyDesc.fixed().setTranslation(...place));
  let anchor: Vec3 = [0, 0, 0];
  const links = spec.links.map(({ axis, toM }, i) => {
    const kg = massKg[i] as number;
    const centre = [0, 1, 2].map((k) => (momentKgM[3 * i + k] as number) / kg);
    const square = centre.reduce((sum, v) => sum + v * v, 0);
    const about = [...inertiaKgM2.subarray(9 * i, 9 * i + 9)].map((value, k) => {
      const [r, c] = [Math.floor(k / 3), k % 3];
      return value - kg * ((r === c ? square : 0) - (centre[r] as number) * (centre[c] as number));
    });
    const { moments, frame } = principal(about);
    const body = world.createRigidBody(
      rapier.RigidBodyDesc.dynamic()
        .setTranslation(...place)
        .setAdditionalMassProperties(kg, vector(centre), vector(moments.map((m) => Math.max(m, 1e-7))), frame)
        .setCanSleep(false),
    );
    const hinge = rapier.JointData.revolute(vector(anchor), vector([0, 0, 0]), vector(axis));
    if (joints === 'unyielding') world.createMultibodyJoint(hinge, before, body, true);
    else world.createImpulseJoint(hinge, before, body, true);
    before = body;
    anchor = toM;
    place = [place[0] + toM[0], place[1] + toM[1], place[2] + toM[2]];
    return { body, axis };
  });
  return { world, links };
}

/** Angle of each joint from the orientations of its two bodies. */
function anglesOf({ links }: World): number[] {
  return links.map(({ body, axis }, i) => {
    const before = i === 0 ? { x: 0, y: 0, z: 0, w: 1 } : (links[i - 1] as (typeof links)[number]).body.rotation();
    const b = body.rotation();
    const x = before.w * b.x - before.x * b.w - before.y * b.z + before.z * b.y;
    const y = before.w * b.y + before.x * b.z - before.y * b.w - before.z * b.x;
    const z = before.w * b.z - before.x * b.y + before.y * b.x - before.z * b.w;
    const w = before.w * b.w + before.x * b.x + before.y * b.y + before.z * b.z;
    return 2 * Math.atan2(x * axis[0] + y * axis[1] + z * axis[2], w);
  });
}

/** Steps with a torque about each joint's axis, which turns the link before the other way. */
function driven({ world, links }: World, torque: ArrayLike<number>, steps: number): void {
  for (let step = 0; step < steps; step++) {
    for (const { body } of links) body.resetTorques(true);
    for (const [i, { body, axis }] of links.entries()) {
      const { x, y, z, w } = body.rotation();
      const [ax, ay, az] = axis;
      const [tx, ty, tz] = [2 * (y * az - z * ay), 2 * (z * ax - x * az), 2 * (x * ay - y * ax)];
      const turned = [ax + w * tx + y * tz - z * ty, ay + w * ty + z * tx - x * tz, az + w * tz + x * ty - y * tx];
      const size = torque[i] as number;
      body.addTorque(vector(turned.map((v) => v * size)), true);
      if (i > 0) (links[i - 1] as (typeof links)[number]).body.addTorque(vector(turned.map((v) => -v * size)), true);
    }
    world.step();
  }
}

describe('the same arm in a physics engine', () => {
  beforeAll(async () => {
    await rapier.init();
  });

  const HELD_S = 0.1;
  const DT_S = 1e-3;

  it('stands still under the torques that our load says', () => {
    const torque = new Float64Array(4);
    loads(bent, 4).torqueNm(new Float64Array(4), torque);
    const held = build(bent, DT_S, 'unyielding');
    driven(held, torque, HELD_S / DT_S);
    // Single precision: a millionth of the torque for a tenth of a second moves it by far less than this.
    for (const angle of anglesOf(held)) expect(Math.abs(angle)).toBeLessThan(2e-4);
  });

  it('and falls when any one of them is 5 % off: the test above can fail', () => {
    const torque = new Float64Array(4);
    loads(bent, 4).torqueNm(new Float64Array(4), torque);
    for (const i of [1, 2, 3]) {
      const loose = build(bent, DT_S, 'unyielding');
      driven(
        loose,
        torque.map((value, k) => (k === i ? 1.05 * value : value)),
        HELD_S / DT_S,
      );
      expect(Math.max(...anglesOf(loose).map(Math.abs)), `joint ${i}`).toBeGreaterThan(1e-3);
    }
  });

  it('swings as our dynamics say when it is let go', () => {
    const dt = 2e-4;
    const loose = build(bent, dt, 'undamped');
    const ours = { q: new Float64Array(4), v: new Float64Array(4) };
    let furthest = 0;
    for (let round = 0; round < 5; round++) {
      driven(loose, [0, 0, 0, 0], 250);
      swing(bent, ours, 1e-3, 50);
      const theirs = anglesOf(loose);
      // The engine's steps are of first order: 2e-4 s of an acceleration of some 20 rad/s^2 over a quarter of a second.
      for (const [j, angle] of theirs.entries()) expect(ours.q[j], `joint ${j}`).toBeCloseTo(angle, 2);
      furthest = Math.max(furthest, ...theirs.map(Math.abs));
    }
    expect(furthest).toBeGreaterThan(0.5);
  });

  it('swings a pendulum with the period of ours', () => {
    const bob = arm([link(0, Y, [0.02, 0, -0.4], { massKg: 1, counterweight: { massKg: 0.2, atM: [0, 0, 0.1] } })]);
    const dt = 4e-4;
    const loose = build(bob, dt, 'undamped');
    const ours = { q: new Float64Array(1), v: new Float64Array(1) };
    for (let round = 0; round < 8; round++) {
      driven(loose, [0], 500);
      swing(bob, ours, 2e-3, 100);
      expect(anglesOf(loose)[0]).toBeCloseTo(ours.q[0] as number, 3);
    }
  });
});
