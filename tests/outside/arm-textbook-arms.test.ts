import { describe, expect, it } from 'vitest';
import { chain } from '../../src/arm/chain.ts';
import { inverse } from '../../src/arm/inverse.ts';
import type { ArmSpec, Vec3 } from '../../src/arm/spec.ts';
import { arm, DEG, link, planar, tipAt } from '../arm/arms.ts';

type Rows = readonly (readonly number[])[];

function times(a: Rows, b: Rows): number[][] {
  return a.map((row) =>
    (b[0] as readonly number[]).map((_, c) => row.reduce((sum, v, k) => sum + v * (b[k]?.[c] as number), 0)),
  );
}

/** Standard Denavit-Hartenberg step, by its definition: turn about z, move along z, move along x, turn about x. */
function step(d: number, a: number, alphaDeg: number): number[][] {
  const c = Math.cos(alphaDeg * DEG);
  const s = Math.sin(alphaDeg * DEG);
  return [
    [1, 0, 0, a],
    [0, c, -s, 0],
    [0, s, c, d],
    [0, 0, 0, 1],
  ];
}

function determinant(m: number[][]): number {
  if (m.length === 1) return m[0]?.[0] as number;
  return (m[0] as number[]).reduce((sum, value, c) => {
    const minor = m.slice(1).map((row) => row.filter((_, k) => k !== c));
    return sum + (c % 2 === 0 ? 1 : -1) * value * determinant(minor);
  }, 0);
}

/**
 * The PUMA 560 in standard Denavit-Hartenberg rows (d, a, alpha): P. Corke's Robotics Toolbox, for MATLAB the wiki page
 * "Arm robot examples", for Python docs/notebooks/kinematics.ipynb, whose model adds d1 = 26.45 in = 0.67183 m.
 */
const PUMA: readonly (readonly [number, number, number])[] = [
  [0.67183, 0, 90],
  [0, 0.4318, 0],
  [0.15005, 0.0203, -90],
  [0.4318, 0, 90],
  [0, 0, -90],
  [0, 0, 0],
];

/** Links from one frame's origin to the next at the zero pose; each joint turns about the z axis of the frame before. */
function puma(): { spec: ArmSpec; zero: Rows } {
  let frame: Rows = [1, 0, 0, 0].map((_, r) => [0, 1, 2, 3].map((c) => (r === c ? 1 : 0)));
  const links = PUMA.map(([d, a, alpha], i) => {
    const axis = frame.slice(0, 3).map((row) => Math.round(row[2] as number)) as unknown as Vec3;
    const next = times(frame, step(d, a, alpha));
    const to = [0, 1, 2].map((r) => (next[r]?.[3] as number) - (frame[r]?.[3] as number)) as unknown as Vec3;
    frame = next;
    return link(i, axis, to);
  });
  return { spec: arm(links), zero: frame };
}

describe('the PUMA 560 of the textbooks', () => {
  const { spec, zero } = puma();
  const poser = chain(spec);
  const nominal = Float64Array.from([0, 45, 180, 0, 45, 0], (deg) => deg * DEG);

  it('has its tip at (0.4521, -0.15005, 0.4318) over its shoulder at the zero pose', () => {
    poser.pose(new Float64Array(6));
    const tip = [...poser.at.subarray(18)];
    expect(tip[0]).toBeCloseTo(0.4521, 12);
    expect(tip[1]).toBeCloseTo(-0.15005, 12);
    expect(tip[2]).toBeCloseTo(0.4318 + 0.67183, 12);
  });

  it('has the toolbox’s tip and orientation at its nominal pose', () => {
    poser.pose(nominal);
    const tip = [...poser.at.subarray(18)];
    expect(tip[0]).toBeCloseTo(0.596303, 6);
    expect(tip[1]).toBeCloseTo(-0.15005, 6);
    expect(tip[2]).toBeCloseTo(0.65748, 5);
    const last = [0, 1, 2].map((r) => [...poser.turn.subarray(45 + 3 * r, 48 + 3 * r)]);
    const turned = times(
      last,
      zero.slice(0, 3).map((row) => row.slice(0, 3)),
    );
    const expected = [0, 0, 1, 0, 1, 0, -1, 0, 0];
    for (const [k, value] of turned.flat().entries()) expect(value).toBeCloseTo(expected[k] as number, 12);
  });

  it('has the toolbox’s measure of manipulability there (test_DHRobot.py, test_yoshi)', () => {
    // T. Yoshikawa's measure sqrt det(J J'): of all six rows 0.07861716534599998, of the translations 0.111181.
    poser.pose(nominal);
    const jacobian = new Float64Array(18);
    poser.jacobian(poser.at, 18, 5, jacobian);
    const columns = [0, 1, 2, 3, 4, 5].map((i) => [
      ...jacobian.subarray(3 * i, 3 * i + 3),
      ...poser.axis.subarray(3 * i, 3 * i + 3),
    ]);
    const measure = (rows: readonly number[]): number => {
      const gram = rows.map((r) =>
        rows.map((s) => columns.reduce((sum, v) => sum + (v[r] as number) * (v[s] as number), 0)),
      );
      return Math.sqrt(determinant(gram));
    };
    expect(measure([0, 1, 2, 3, 4, 5])).toBeCloseTo(0.07861716534599998, 12);
    expect(measure([0, 1, 2])).toBeCloseTo(0.111181, 6);
    // Three axes at right angles, each twice: sqrt 6.
    expect(measure([3, 4, 5])).toBeCloseTo(Math.sqrt(6), 12);
  });
});

/** Calls the solver until it stands, from a guess. */
function settle(spec: ArmSpec, target: readonly number[], guess: readonly number[], calls = 300): number[] {
  const n = guess.length;
  const solver = inverse(spec, {
    minRad: new Float64Array(n).fill(-Math.PI),
    maxRad: new Float64Array(n).fill(Math.PI),
    moves: guess.map((_, j) => j),
  });
  const angles = Float64Array.from(guess);
  for (let call = 0; call < calls; call++) solver.solve(Float64Array.from(target), Float64Array.from(guess), angles);
  return [...angles];
}

describe('the planar 2R arm', () => {
  it('has both answers of the problem l1 = 1, l2 = 2, target (2.5, 1.4)', () => {
    // Problem in R. S. Esfandiari, Numerical Methods for Engineers and Scientists Using MATLAB, guess (0.8, 0.9);
    // answers computed from the law of cosines.
    const two = planar([1, 2]);
    const one = settle(two, [2.5, 0, 1.4], [0.8, 0.9]);
    expect(one[0]).toBeCloseTo(0.0809335655, 8);
    expect(one[1]).toBeCloseTo(0.6393227911, 8);
    const other = settle(two, [2.5, 0, 1.4], [0.8, -0.9]);
    expect(other[0]).toBeCloseTo(0.9400430783, 8);
    expect(other[1]).toBeCloseTo(-0.6393227911, 8);
  });
});

describe('the planar 3R arm of J. J. Craig, Introduction to Robotics (MATLAB exercises 3 and 4; from memory, recomputed)', () => {
  const three = planar([4, 3, 2]);
  const reached = (...deg: number[]): number[] => {
    const tip = tipAt(
      three,
      deg.map((value) => value * DEG),
    );
    return [tip[0] as number, tip[2] as number];
  };

  it('reaches the worked places', () => {
    expect(reached(0, 0, 0)).toEqual([9, 0]);
    const bent = reached(10, 20, 30);
    expect(bent[0]).toBeCloseTo(7.5373, 4);
    expect(bent[1]).toBeCloseTo(3.9266, 4);
    const folded = reached(90, 90, 90);
    expect(folded[0]).toBeCloseTo(-3, 12);
    expect(folded[1]).toBeCloseTo(2, 12);
  });

  it('is found by the inverse at either elbow, when the last link keeps its pitch', () => {
    // (7.5373, 3.9266) with the last link at 60 degrees: (10, 20, 30) or (27.11, -20, 52.89) degrees.
    for (const [guess, answer] of [
      [
        [0.3, 0.5, 0.3],
        [10, 20, 30],
      ],
      [
        [0.3, -0.5, 0.9],
        [27.11, -20, 52.89],
      ],
    ] as const) {
      const solver = inverse(three, {
        minRad: new Float64Array(3).fill(-3),
        maxRad: new Float64Array(3).fill(3),
        moves: [0, 1, 2],
      });
      solver.pitchRad[0] = 60 * DEG;
      const angles = Float64Array.from(guess);
      const target = Float64Array.of(...reached(10, 20, 30).flatMap((v, k) => (k === 0 ? [v, 0] : [v])));
      // The pitch counts a hundred times as much as the preferred pose; so preferring where it is leaves nothing over.
      for (let call = 0; call < 400; call++) solver.solve(target, angles.slice(), angles);
      for (const [j, deg] of answer.entries()) expect((angles[j] as number) / DEG).toBeCloseTo(deg, 1);
    }
  });
});
