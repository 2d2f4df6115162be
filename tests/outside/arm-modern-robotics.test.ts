import { describe, expect, it } from 'vitest';
import { chain } from '../../src/arm/chain.ts';
import { dynamics } from '../../src/arm/dynamics.ts';
import { inverse } from '../../src/arm/inverse.ts';
import type { Vec3 } from '../../src/arm/spec.ts';
import { arm, DEG, link, planar, X, Y, Z } from '../arm/arms.ts';

/**
 * Against K. M. Lynch and F. C. Park, Modern Robotics, Cambridge University Press 2017. Numbers with eight digits are
 * printed in the doc-strings of the book's own software, core.py.
 */

function expectClose(actual: Iterable<number>, expected: readonly number[], digits: number): void {
  const list = [...actual];
  expect(list).toHaveLength(expected.length);
  for (const [i, value] of expected.entries()) expect(list[i], `entry ${i}`).toBeCloseTo(value, digits);
}

describe('axes of an arm, against the Jacobians of Modern Robotics', () => {
  // JacobianSpace, JacobianBody: screws about z, x, y, x at (0.2, 1.1, 0.1, 1.2). Their pitches are left out: a chain of
  // revolute joints has none, and the turning rows do not depend on them.
  const arms = chain(arm([Z, X, Y, X].map((axis, i) => link(i, axis, [0.1 * (i + 1), 0, 0.2]))));

  it('turn as the rows of the space Jacobian', () => {
    arms.pose(Float64Array.of(0.2, 1.1, 0.1, 1.2));
    const row = (r: number): number[] => [0, 1, 2, 3].map((i) => arms.axis[3 * i + r] as number);
    expectClose(row(0), [0, 0.98006658, -0.09011564, 0.95749426], 8);
    expectClose(row(1), [0, 0.19866933, 0.4445544, 0.28487557], 8);
    expectClose(row(2), [1, 0, 0.89120736, -0.04528405], 8);
  });

  it('and seen from the last link, as the rows of the body Jacobian', () => {
    arms.pose(Float64Array.of(0.2, 1.1, 0.1, 1.2));
    const column = (i: number): number[] =>
      [0, 1, 2].map((c) =>
        [0, 1, 2].reduce((sum, r) => sum + (arms.turn[27 + 3 * r + c] as number) * (arms.axis[3 * i + r] as number), 0),
      );
    expectClose(column(0), [-0.04528405, 0.74359313, -0.66709716], 8);
    expectClose(column(1), [0.99500417, 0.09304865, 0.03617541], 8);
    expectClose(column(2), [0, 0.36235775, -0.93203909], 8);
    expectClose(column(3), [1, 0, 0], 8);
  });
});

describe('the UR5 of Modern Robotics, section 4.1.2', () => {
  // Metres: W1 109 mm, W2 82 mm, L1 425 mm, L2 392 mm, H1 89 mm, H2 95 mm, and the worked pose: from memory, and by hand:
  // the arm stands up, so the tip is at (H2, W1, H1 + L1 + L2 + W2).
  it('has its tip where the worked example has it', () => {
    const ur5 = chain(
      arm([
        link(0, Z, [0, 0, 0.089]),
        link(1, Y, [0.425, 0, 0]),
        link(2, Y, [0.392, 0, 0]),
        link(3, Y, [0, 0.109, 0]),
        link(4, [0, 0, -1], [0, 0, -0.095]),
        link(5, Y, [0, 0.082, 0]),
      ]),
    );
    ur5.pose(Float64Array.of(0, -Math.PI / 2, 0, 0, Math.PI / 2, 0));
    expectClose(ur5.at.subarray(18), [0.095, 0.109, 0.988], 12);
  });
});

describe('the planar 2R arm of Modern Robotics, chapters 5 and 6', () => {
  const two = planar([1, 1]);

  it('has the Jacobians of the opening example of chapter 5 (from memory, recomputed)', () => {
    const poser = chain(two);
    const jacobian = new Float64Array(6);
    for (const [bend, columns] of [
      [45, [-0.7071, 1.7071, -0.7071, 0.7071]],
      [135, [-0.7071, 0.2929, -0.7071, -0.7071]],
    ] as const) {
      poser.pose(Float64Array.of(0, bend * DEG));
      poser.jacobian(poser.at, 6, 1, jacobian);
      // The book's plane is x, y; here it is x, z.
      expectClose([jacobian[0], jacobian[2], jacobian[3], jacobian[5]] as number[], columns, 4);
    }
  });

  it('finds the answer of example 6.1 from its guess, where Newton in position alone wanders off by 300 degrees', () => {
    // Example 6.1 (from memory, its iterates recomputed): from (0, 30) degrees to the tip of (30, 90) degrees.
    const solver = inverse(two, {
      minRad: Float64Array.of(-Math.PI, -Math.PI),
      maxRad: Float64Array.of(Math.PI, Math.PI),
      moves: [0, 1],
    });
    const target = Float64Array.of(
      Math.cos(30 * DEG) + Math.cos(120 * DEG),
      0,
      Math.sin(30 * DEG) + Math.sin(120 * DEG),
    );
    const angles = Float64Array.of(0, 30 * DEG);
    let widest = 0;
    for (let call = 0; call < 30; call++) {
      solver.solve(target, angles.slice(), angles);
      widest = Math.max(widest, Math.abs(angles[0] as number), Math.abs(angles[1] as number));
    }
    expectClose(
      [...angles].map((rad) => rad / DEG),
      [30, 90],
      6,
    );
    expect(widest / DEG).toBeLessThan(100);
  });
});

describe('dynamics of the three-link arm in the doc-strings of Modern Robotics', () => {
  // core.py, InverseDynamics, MassMatrix, VelQuadraticForces, GravityForces, EndEffectorForces.
  // Its first screw (1, 0, 1, 0, 1, 0) has no unit axis: its joint turns sqrt 2 radians for each of its own, about a line
  // through (0, 0, 1), and so takes 1 / sqrt 2 of the torque.
  const R2 = Math.SQRT2;
  const centres: readonly Vec3[] = [
    [0, 0, 0.089159],
    [0.28, 0.13585, 0.089159],
    // M12's orientation maps (0, -0.1197, 0.395) to (0.395, -0.1197, 0).
    [0.675, 0.01615, 0.089159],
  ];
  const starts: readonly Vec3[] = [
    [0, 0, 1],
    [0, 0, 0.089],
    [0.425, 0, 0.089],
  ];
  /** M34 = (0, 0, 0.14225) in M12's orientation. */
  const end: Vec3 = [0.81725, 0.01615, 0.089159];
  const minus = (a: Vec3, b: Vec3): Vec3 => [a[0] - b[0], a[1] - b[1], a[2] - b[2]];
  const masses = [3.7, 8.393, 2.275];
  const axes: readonly Vec3[] = [[1 / R2, 0, 1 / R2], Y, Y];
  const three = arm(
    starts.map((start, i) =>
      link(i, axes[i] as Vec3, minus(starts[i + 1] ?? end, start), {
        massKg: masses[i] as number,
        centreM: minus(centres[i] as Vec3, start),
      }),
    ),
    { heightM: 1 },
  );
  // G1 is in the base's orientation; M12 turns x to z: diag(a, b, c) becomes diag(c, b, a).
  const diagonal = (x: number, y: number, z: number): number[] => [x, 0, 0, 0, y, 0, 0, 0, z];
  const inertia = [
    diagonal(0.010267, 0.010267, 0.00666),
    diagonal(0.0151074, 0.22689, 0.22689),
    diagonal(0.004095, 0.0494433, 0.0494433),
  ];
  const { torqueNm, inertialNm } = dynamics(three, { inertia, gravityMS2: 9.8 });
  const still = Float64Array.of(0, 0, 0);
  const ours = (a: number, b: number, c: number): Float64Array => Float64Array.of(R2 * a, b, c);
  const theirs = (torque: Float64Array): number[] => [
    R2 * (torque[0] as number),
    torque[1] as number,
    torque[2] as number,
  ];
  const theta = ours(0.1, 0.1, 0.1);
  const speeds = ours(0.1, 0.2, 0.3);
  const out = new Float64Array(3);
  const torque = (q: Float64Array, qd: Float64Array, qdd: Float64Array): number[] => {
    torqueNm(q, qd, qdd, out);
    return theirs(out);
  };
  const gravity = [28.40331262, -37.64094817, -5.4415892];

  it('hold it with the printed gravity torques', () => {
    expectClose(torque(theta, still, still), gravity, 7);
  });

  it('have the printed velocity torques', () => {
    const both = torque(theta, speeds, still);
    expectClose(
      both.map((value, j) => value - (gravity[j] as number)),
      [0.26453118, -0.05505157, -0.00689132],
      7,
    );
  });

  it('have the printed mass matrix', () => {
    const columns = [ours(1, 0, 0), ours(0, 1, 0), ours(0, 0, 1)].map((unit) => {
      inertialNm(theta, unit, out);
      return theirs(out);
    });
    expectClose(columns[0] as number[], [22.543338, -0.307146754, -0.00718426391], 6);
    expectClose(columns[1] as number[], [-0.307146754, 1.96850717, 0.432157368], 6);
    expectClose(columns[2] as number[], [-0.00718426391, 0.432157368, 0.191630858], 6);
  });

  it('need the printed torques in all, with the wrench of ones at the tip', () => {
    const poser = chain(three);
    poser.pose(theta);
    const jacobian = new Float64Array(9);
    poser.jacobian(poser.at, 9, 2, jacobian);
    // The tip's frame has M12's orientation: its x, y, z axes are -z, y, x of the last link's frame.
    const inTip = [-1, 1, 1];
    const world = [0, 1, 2].map((r) => {
      const [x, y, z] = [poser.turn[18 + 3 * r], poser.turn[19 + 3 * r], poser.turn[20 + 3 * r]] as number[];
      return (
        (inTip[0] as number) * (z as number) +
        (inTip[1] as number) * (y as number) +
        (inTip[2] as number) * (x as number)
      );
    });
    const wrench = Float64Array.from([0, 1, 2], (i) =>
      [0, 1, 2].reduce(
        (sum, r) => sum + (world[r] as number) * ((jacobian[3 * i + r] as number) + (poser.axis[3 * i + r] as number)),
        0,
      ),
    );
    expectClose(theirs(wrench), [1.40954608, 1.85771497, 1.392409], 7);
    const motion = torque(theta, speeds, ours(2, 1.5, 1));
    expectClose(
      motion.map((value, j) => value + (theirs(wrench)[j] as number)),
      [74.69616155, -33.06766016, -3.23057314],
      7,
    );
  });
});
