import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { chain } from '../../src/arm/chain.ts';
import { reachM } from '../../src/arm/extent.ts';
import { inverse, type InverseOptions } from '../../src/arm/inverse.ts';
import type { ArmSpec } from '../../src/arm/spec.ts';
import { random } from '../../src/sim/random.ts';
import { angles, arm, bird, builtArm, DEG, distance, finite, link, planar, tipAt, X, Y, Z } from './arms.ts';

const WIDE = 2.8;

function solverOf(spec: ArmSpec, changes: Partial<InverseOptions> = {}) {
  const n = spec.links.length;
  return inverse(spec, {
    minRad: new Float64Array(n).fill(-WIDE),
    maxRad: new Float64Array(n).fill(WIDE),
    moves: spec.links.map((_, j) => j),
    ...changes,
  });
}

/** Calls a solver on a standing target until nothing moves; the answer, and how many calls it took. */
function settled(
  solver: ReturnType<typeof solverOf>,
  target: ArrayLike<number>,
  prefer: Float64Array,
  start: Float64Array,
  calls = 400,
): { angles: Float64Array; calls: number; leftM: number } {
  const q = start.slice();
  const before = q.slice();
  let call = 0;
  for (; call < calls; call++) {
    before.set(q);
    solver.solve(Float64Array.from(target), prefer, q);
    if (q.every((angle, j) => Math.abs(angle - (before[j] as number)) < 1e-9)) break;
  }
  return { angles: q, calls: call, leftM: solver.leftM[0] as number };
}

/** Smallest singular value of the tip's Jacobian as a share of the reach, by the power method on its inverse Gram matrix. */
function stiffness(spec: ArmSpec, pose: Float64Array): number {
  const poser = chain(spec);
  const n = poser.links;
  const jacobian = new Float64Array(3 * n);
  poser.pose(pose);
  poser.jacobian(poser.at, 3 * n, n - 1, jacobian);
  const gram = [0, 1, 2].map((r) =>
    [0, 1, 2].map((s) =>
      Array.from({ length: n }, (_, i) => (jacobian[3 * i + r] as number) * (jacobian[3 * i + s] as number)).reduce(
        (sum, value) => sum + value,
        0,
      ),
    ),
  ) as [number, number, number][];
  // det / (product of the two larger ones) underestimates it by less than the trace's square does.
  const [a, b, c] = gram as [[number, number, number], [number, number, number], [number, number, number]];
  const det =
    a[0] * (b[1] * c[2] - b[2] * c[1]) - a[1] * (b[0] * c[2] - b[2] * c[0]) + a[2] * (b[0] * c[1] - b[1] * c[0]);
  const trace = a[0] + b[1] + c[2];
  return Math.sqrt(Math.max(0, det)) / (trace || 1) / reachM(spec);
}

describe('the inverse of an arm, for a standing target', () => {
  it('is met: forward of inverse is the target inside reach, for random arms', () => {
    fc.assert(
      fc.property(builtArm, angles(6, 2), angles(6, 0.4), angles(6, 1), (spec, pose, off, prefer) => {
        const target = tipAt(spec, pose);
        const n = spec.links.length;
        const start = pose.map((angle, j) => angle + (off[j] as number)).subarray(0, n);
        const { angles: found, leftM } = settled(solverOf(spec), target, prefer.subarray(0, n), start);
        expect(distance(tipAt(spec, found), target)).toBeCloseTo(leftM, 12);
        // Parts of the reach; near a singular pose the tip gives way a little to the preferred pose.
        expect(leftM / reachM(spec)).toBeLessThan(stiffness(spec, found) > 0.05 ? 1e-6 : 1e-3);
      }),
      { endOnFailure: true },
    );
  });

  it('is met in one call to a tenth of the way, when the target has only moved a little', () => {
    fc.assert(
      fc.property(builtArm, angles(6, 2), angles(6, 0.02), (spec, pose, off) => {
        fc.pre(stiffness(spec, pose) > 0.1);
        const n = spec.links.length;
        const target = tipAt(spec, pose);
        const start = pose.map((angle, j) => angle + (off[j] as number)).subarray(0, n);
        const way = distance(tipAt(spec, start), target);
        const solver = solverOf(spec);
        solver.solve(Float64Array.from(target), start.slice(), start);
        expect(solver.leftM[0]).toBeLessThanOrEqual(0.1 * way + 1e-9);
      }),
    );
  });

  it('is the nearest reachable point beyond reach: what is left is the geometric shortfall, for planar arms', () => {
    fc.assert(
      fc.property(
        fc.array(finite(0.1, 0.6), { minLength: 2, maxLength: 5 }),
        finite(-1.2, 1.2),
        finite(1.001, 3),
        angles(5, 0.6),
        (lengths, direction, share, prefer) => {
          const spec = planar(lengths);
          const reach = reachM(spec);
          const target = [share * reach * Math.cos(direction), 0, share * reach * Math.sin(direction)];
          const n = lengths.length;
          const { leftM } = settled(solverOf(spec), target, prefer.subarray(0, n), prefer.slice(0, n));
          expect(leftM).toBeGreaterThanOrEqual((share - 1) * reach * (1 - 1e-9));
          expect(leftM).toBeLessThanOrEqual((share - 1) * reach + 2e-4 * reach);
        },
      ),
    );
  });

  it('is the nearest point of the hole that unlike links leave around the first axis', () => {
    // By hand: links of 0.5 and 0.2 come no nearer than 0.3.
    const round = { minRad: Float64Array.of(-4, -4), maxRad: Float64Array.of(4, 4) };
    const start = Float64Array.of(0, 2);
    const { leftM } = settled(solverOf(planar([0.5, 0.2]), round), [0.05, 0, 0], start, start);
    expect(leftM).toBeCloseTo(0.25, 4);
  });

  it('leaves the plane of a planar arm alone, and reaches the foot of the perpendicular', () => {
    const { leftM } = settled(
      solverOf(planar([0.5, 0.4])),
      [0.4, 0.3, 0.4],
      Float64Array.of(0, 1),
      Float64Array.of(0, 1),
    );
    expect(leftM).toBeCloseTo(0.3, 8);
  });

  it('stays in the joints’ ranges, and solves the rest without those at an end', () => {
    fc.assert(
      fc.property(builtArm, angles(6, 2), angles(6, 1), finite(0.3, 1.5), (spec, pose, prefer, range) => {
        const n = spec.links.length;
        const minRad = new Float64Array(n).fill(-range);
        const maxRad = new Float64Array(n).fill(range);
        const solver = solverOf(spec, { minRad, maxRad });
        const start = prefer.subarray(0, n).map((angle) => Math.min(Math.max(angle, -range), range));
        const { angles: found } = settled(solver, tipAt(spec, pose), prefer.subarray(0, n), start, 60);
        for (const angle of found) expect(Math.abs(angle)).toBeLessThanOrEqual(range);
      }),
    );
    // By hand: with the shoulder stuck at 0.2 rad, the elbow alone turns the second link toward the target above.
    const two = planar([0.5, 0.5]);
    const solver = solverOf(two, { minRad: Float64Array.of(-0.2, -WIDE), maxRad: Float64Array.of(0.2, WIDE) });
    const { angles: found } = settled(solver, [0.2, 0, 0.8], Float64Array.of(0, 0.5), Float64Array.of(0, 0.5));
    const elbow = [0.5 * Math.cos(0.2), 0.5 * Math.sin(0.2)] as const;
    const toward = Math.atan2(0.8 - elbow[1], 0.2 - elbow[0]);
    expect(found[0]).toBe(0.2);
    expect(found[1]).toBeCloseTo(toward - 0.2, 6);
  });

  it('puts joints that do not reach at the joint-mode pose, inside their range', () => {
    const solver = solverOf(bird(), { moves: [0, 1, 2, 3], maxRad: Float64Array.of(WIDE, WIDE, WIDE, WIDE, 0.5) });
    const q = new Float64Array(5);
    solver.solve(Float64Array.of(0.3, 0, 0.3), Float64Array.of(0, 0.5, 0.5, 0.5, 0.9), q);
    expect(q[4]).toBe(0.5);
  });

  it('leaves a straight arm that is pulled along itself', () => {
    const { leftM, angles: found } = settled(
      solverOf(planar([0.5, 0.5])),
      [0.7, 0, 0],
      new Float64Array(2),
      new Float64Array(2),
    );
    expect(leftM).toBeLessThan(1e-6);
    // By hand, from the law of cosines: cos q2 = 0.7^2 / (2 * 0.5^2) - 1.
    expect(Math.abs(found[1] as number)).toBeCloseTo(Math.acos(0.98 - 1), 6);
  });

  it('works for an arm none of whose joints reach', () => {
    const solver = solverOf(bird(), { moves: [] });
    const prefer = Float64Array.of(0.1, 0.2, 0.3, 0.4, 0.5);
    const q = new Float64Array(5);
    solver.solve(Float64Array.of(0.3, 0, 0.3), prefer, q);
    expect([...q]).toEqual([...prefer]);
    expect(solver.leftM[0]).toBeCloseTo(distance(tipAt(bird(), prefer), [0.3, 0, 0.3]), 12);
  });
});

describe('what is not known', () => {
  const prefer = Float64Array.of(0, 0.6, 0.6, 0.3, 0.2);

  it('as a target changes nothing', () => {
    const q = prefer.slice();
    solverOf(bird()).solve(Float64Array.of(0.3, Number.NaN, 0.2), new Float64Array(5), q);
    expect([...q]).toEqual([...prefer]);
  });

  it('as a preferred angle is no wish: the joint goes where the tip needs it, or stays', () => {
    const solver = solverOf(bird(), { moves: [0, 1, 2, 3] });
    const q = prefer.slice();
    const unknown = Float64Array.of(Number.NaN, 0.5, Number.NaN, 0.2, Number.NaN);
    for (let call = 0; call < 50; call++) solver.solve(Float64Array.of(0.3, 0.1, 0.3), unknown, q);
    expect(solver.leftM[0]).toBeLessThan(1e-6);
    expect(q.every(Number.isFinite)).toBe(true);
    expect(q[4]).toBe(0.2);
  });
});

describe('joints to spare', () => {
  it('settle at the pose nearest to the joint-mode pose that still has the tip on its target', () => {
    const spec = planar([0.3, 0.3, 0.2, 0.2]);
    const target = [0.5, 0, 0.4];
    const prefer = Float64Array.of(0.2, 0.9, -0.3, 0.5);
    const { angles: found, leftM } = settled(solverOf(spec), target, prefer, Float64Array.of(0.3, 0.3, 0.3, 0.3));
    expect(leftM).toBeLessThan(1e-7);
    // There the way to the pose is at right angles to every motion that keeps the tip: it is a mean of the Jacobian's rows.
    const poser = chain(spec);
    const jacobian = new Float64Array(12);
    poser.pose(found);
    poser.jacobian(poser.at, 12, 3, jacobian);
    const rows = [0, 2].map((k) => Array.from({ length: 4 }, (_, i) => jacobian[3 * i + k] as number)) as [
      number[],
      number[],
    ];
    const dot = (a: readonly number[], b: readonly number[]): number =>
      a.reduce((sum, v, k) => sum + v * (b[k] as number), 0);
    const rest = [...found].map((angle, j) => angle - (prefer[j] as number));
    const unit = rows[0].map((v) => v / Math.sqrt(dot(rows[0], rows[0])));
    const second = rows[1].map((v, k) => v - dot(rows[1], unit) * (unit[k] as number));
    const other = second.map((v) => v / Math.sqrt(dot(second, second)));
    const free = rest.map(
      (v, k) => v - dot(rest, unit) * (unit[k] as number) - dot(rest, other) * (other[k] as number),
    );
    expect(Math.sqrt(dot(free, free))).toBeLessThan(1e-6);
    expect(Math.sqrt(dot(rest, rest))).toBeGreaterThan(0.1);
  });

  it('are at the joint-mode pose itself where that has the tip on its target', () => {
    const prefer = Float64Array.of(0.3, 0.6, 0.5, 0.4, 0.2);
    const { angles: found } = settled(
      solverOf(bird()),
      tipAt(bird(), prefer),
      prefer,
      Float64Array.of(0.2, 0.4, 0.6, 0.6, 0.2),
    );
    for (const [j, angle] of prefer.entries()) expect(found[j]).toBeCloseTo(angle, 5);
  });

  it('keep the last link’s pitch to a degree', () => {
    const prefer = Float64Array.of(0, 0.6, 0.6, 0.3, 0);
    const target = [0.3, 0.1, 0.3];
    const pitchOf = (pitch: number): number => {
      const solver = solverOf(bird(), { moves: [0, 1, 2, 3] });
      solver.pitchRad[0] = pitch;
      const { angles: found, leftM } = settled(solver, target, prefer, prefer);
      expect(leftM).toBeLessThan(1e-6);
      const poser = chain(bird());
      poser.pose(found);
      return Math.asin(((poser.at[17] as number) - (poser.at[14] as number)) / 0.03);
    };
    for (const pitch of [-60, -20, 0, 10]) expect(Math.abs(pitchOf(pitch * DEG) / DEG - pitch)).toBeLessThan(1);
    expect(Math.abs(pitchOf(Number.NaN) / DEG + 20)).toBeGreaterThan(2);
  });

  it('keep a pitch only where one is free for it: the tip comes first', () => {
    const solver = solverOf(planar([0.5, 0.4]));
    solver.pitchRad[0] = 1;
    const { leftM } = settled(solver, [0.5, 0, 0.4], Float64Array.of(0, 0.5), Float64Array.of(0, 0.5));
    expect(leftM).toBeLessThan(1e-7);
  });
});

interface Sweep {
  readonly widest: number;
  /** Sum of how far every joint went, both ways. */
  readonly travelled: number;
  readonly leftM: number;
  readonly last: Float64Array;
}

/** Leads the bird's tip along a path of 4 s at a rate, with as much noise as a pot has. */
function lead(
  hz: number,
  path: (t: number) => readonly [number, number, number],
  prefer: readonly number[],
  noiseM = 0,
): Sweep {
  const solver = solverOf(bird(), { moves: [0, 1, 2, 3] });
  const chance = random(7, 0);
  const pose = Float64Array.from(prefer);
  const { angles: q } = settled(solver, path(0), pose, pose);
  const before = q.slice();
  let widest = 0;
  let travelled = 0;
  let leftM = 0;
  for (let k = 0; k <= 4 * hz; k++) {
    before.set(q);
    const target = Float64Array.from(path(k / (4 * hz)), (value) => value + noiseM * (chance.uniform() - 0.5));
    solver.solve(target, pose, q);
    for (let j = 0; j < 5; j++) {
      const moved = Math.abs((q[j] as number) - (before[j] as number));
      widest = Math.max(widest, moved);
      travelled += moved;
    }
    leftM = Math.max(leftM, solver.leftM[0] as number);
  }
  return { widest, travelled, leftM, last: q };
}

/**
 * Arms that shook on a standing target when a part of the solver was left out, found by trying thousands: a column, then
 * links about the axes named, all joints within a range.
 */
const SHAKEN = [
  {
    without: 'room for the bend of what joints to spare do',
    columnM: 0.15,
    axes: [X, X, X, X, Y],
    lengths: [0.51, 0.38, 0.6, 0.21, 0.35],
    range: 2.04,
    prefer: [-1.73, 0, -0.01, 1.03, 0, 0],
    target: [-0.54, 0.96, -0.24],
    pitchRad: -0.63,
  },
  {
    without: 'counting a joint as at its end a little before it',
    columnM: 0.3,
    axes: [Y, X, X, X, X],
    lengths: [0.34, 0.51, 0.43, 0.4, 0.45],
    range: 2.13,
    prefer: [0.52, -0.15, 0, 1.81, -1.82, -1.89],
    target: [-0.29, -0.81, -0.11],
    pitchRad: 0.78,
  },
  {
    without: 'the bend of the pitch',
    columnM: 0.08,
    axes: [X, X, Y, X, Y],
    lengths: [0.44, 0.54, 0.48, 0.21, 0.16],
    range: 2.78,
    prefer: [0, 0, 2.48, 0, 0, 0],
    target: [0.62, -0.5, 0.68],
    pitchRad: 1.47,
  },
  {
    without: 'going only as far as the first joint may',
    columnM: 0.28,
    axes: [Y, X, Y, Y, X],
    lengths: [0.26, 0.16, 0.43, 0.37, 0.18],
    range: 0.82,
    prefer: [0, 0, -0.74, 0.67, 0, 0],
    target: [0.57, -0.63, 0.93],
    pitchRad: Number.NaN,
  },
  {
    without: 'the bend of the tip’s way beyond reach',
    columnM: 0.09,
    axes: [X, X, Y],
    lengths: [0.25, 0.17, 0.19],
    range: 2,
    prefer: [-1.27, 0, 0, -0.84],
    target: [-0.56, -0.42, 0.18],
    pitchRad: -0.49,
  },
  {
    without: 'a limit to the pull of a pitch that cannot be had',
    columnM: 0.25,
    axes: [X, Y, Y],
    lengths: [0.37, 0.56, 0.48],
    range: 1.48,
    prefer: [0, 1.21, 0, 0],
    target: [0.5, -0.4, 0.14],
    pitchRad: 0.49,
  },
] as const;

/** The widest step that took back some of the step before it, after a target has stood for 400 calls. */
function shakeOf(solver: ReturnType<typeof solverOf>, target: ArrayLike<number>, prefer: Float64Array): number {
  const q = prefer.slice();
  const before = q.slice();
  const step = new Float64Array(q.length);
  let shake = 0;
  for (let call = 0; call < 500; call++) {
    before.set(q);
    solver.solve(Float64Array.from(target), prefer, q);
    for (let j = 0; j < q.length; j++) {
      const moved = (q[j] as number) - (before[j] as number);
      const back = moved * (step[j] as number) < 0 ? Math.min(Math.abs(moved), Math.abs(step[j] as number)) : 0;
      if (call >= 400) shake = Math.max(shake, back);
      step[j] = moved;
    }
  }
  return shake;
}

describe('a target that stands', () => {
  for (const { without, columnM, axes, lengths, range, prefer, target, pitchRad } of SHAKEN) {
    it(`does not shake the arm that it shook without ${without}`, () => {
      const links = axes.map((axis, i) => link(i + 1, axis, [0, 0, lengths[i] as number]));
      const spec = arm([link(0, Z, [0, 0, columnM]), ...links]);
      const maxRad = new Float64Array(spec.links.length).fill(range);
      const solver = solverOf(spec, { minRad: maxRad.map((angle) => -angle), maxRad });
      solver.pitchRad[0] = pitchRad;
      expect(shakeOf(solver, target, Float64Array.from(prefer))).toBeLessThan(1e-5);
    });
  }

  it('does not shake any arm, wherever it is: what still moves does not turn back', () => {
    const place = fc.tuple(finite(-2, 2), finite(-2, 2), finite(-1, 4));
    const pitch = fc.oneof(fc.constant(Number.NaN), finite(-1.5, 1.5));
    fc.assert(
      fc.property(
        builtArm,
        place,
        angles(6, 1.2),
        finite(0.3, WIDE),
        pitch,
        (spec, target, prefer, range, pitchRad) => {
          const n = spec.links.length;
          const maxRad = new Float64Array(n).fill(range);
          const solver = solverOf(spec, { minRad: maxRad.map((angle) => -angle), maxRad });
          solver.pitchRad[0] = pitchRad;
          const pose = prefer.slice(0, n).map((angle) => Math.min(Math.max(angle, -range), range));
          // A hundredth of a degree and less: in one of some ten thousand arms it was 4e-4 rad.
          expect(shakeOf(solver, target, pose)).toBeLessThan(1e-3);
        },
      ),
      { numRuns: 40, endOnFailure: true },
    );
  });
});

describe('a target that moves, at 50 and at 200 commands a second', () => {
  const BENT = [0, 0.6, 0.6, 0.3, 0];
  /** Most that a joint turns in a call. */
  const TURN = 0.2 + 1e-12;

  for (const hz of [50, 200]) {
    it(`passes the base’s axis at 5 mm without a jump, at ${hz} Hz`, () => {
      // The base has to turn by half a turn meanwhile: at 0.15 m/s it would take 30 rad/s, and lags instead.
      const { widest, leftM } = lead(hz, (t) => [0.3 - 0.6 * t, 0.005, 0.3], BENT);
      expect(widest).toBeLessThanOrEqual(TURN);
      expect(leftM).toBeLessThan(0.012);
    });

    it(`goes right through the base’s axis without turning the base, at ${hz} Hz`, () => {
      const { widest, leftM } = lead(hz, (t) => [0.3 - 0.6 * t, 0, 0.3], BENT);
      expect(widest).toBeLessThan(3 / hz);
      expect(leftM).toBeLessThan(1e-3);
    });

    it(`goes out through the edge of reach and comes back, at ${hz} Hz`, () => {
      const out = (t: number): [number, number, number] => {
        const r = 0.35 + 0.4 * Math.sin(Math.PI * t);
        return [0.8 * r, 0, 0.04 + 0.6 * r];
      };
      const bent = lead(hz, out, BENT);
      expect(bent.widest).toBeLessThanOrEqual(TURN);
      // By hand: 0.56 m from the shoulder is as far as it reaches, and the target goes to 0.75.
      expect(bent.leftM).toBeCloseTo(0.19, 6);
      const straight = lead(hz, out, [0, 0.9, 0, 0, 0]);
      expect(straight.widest).toBeLessThanOrEqual(TURN);
    });

    it(`follows along outside of reach as smoothly as it leads, at ${hz} Hz`, () => {
      // The target goes round by 2 rad at most: no joint need go faster than that, plus the base's catching up.
      const { widest } = lead(hz, (t) => [0.8 * Math.sin(2 * t - 1), 0.2, 0.04 + 0.8 * Math.cos(2 * t - 1)], BENT);
      expect(widest).toBeLessThan(3 / hz);
    });

    it(`does not shake at the edge, beyond it or on the axis, when the target trembles by 2 mm, at ${hz} Hz`, () => {
      const places: readonly (readonly [number, number, number])[] = [
        [0.53 * 0.8, 0, 0.04 + 0.53 * 0.6],
        [0.56 * 0.8, 0, 0.04 + 0.56 * 0.6],
        [0.6 * 0.8, 0, 0.04 + 0.6 * 0.6],
        [0, 0, 0.4],
      ];
      for (const place of places) {
        const { widest, travelled } = lead(hz, () => place, BENT, 0.002);
        // 1 mm either way is 0.0017 of the reach: ten radians for a whole reach, and twice that for two looks.
        expect(widest).toBeLessThan(0.035);
        expect(travelled / (4 * hz)).toBeLessThan(0.04);
      }
    });
  }

  it('never turns a joint by more than it may in a call, wherever the target jumps', () => {
    const target = fc.tuple(finite(-3, 3), finite(-3, 3), finite(-3, 3));
    fc.assert(
      fc.property(
        builtArm,
        fc.array(target, { minLength: 1, maxLength: 12 }),
        angles(6, 2),
        (spec, targets, prefer) => {
          const n = spec.links.length;
          const solver = solverOf(spec, { turnMaxRad: 0.1 });
          const q = prefer.slice(0, n);
          const before = q.slice();
          for (const place of targets) {
            before.set(q);
            solver.solve(Float64Array.from(place), prefer.subarray(0, n), q);
            for (let j = 0; j < n; j++)
              expect(Math.abs((q[j] as number) - (before[j] as number))).toBeLessThanOrEqual(0.1 + 1e-12);
          }
        },
      ),
    );
  });
});

describe('damping', () => {
  it('holds a straight arm’s answer to a sideways tug in proportion, and to one along it as well', () => {
    // Damped least squares answers an error e along a singular value s with s e / (s^2 + damping^2), at most e / (2 damping):
    // 10 radians for each reach at 0.05 (the formula as in S. R. Buss's tutorial, 2004), in each of two looks.
    const spec = arm([link(0, Z, [0, 0, 0]), link(1, Y, [0.3, 0, 0]), link(2, Y, [0.3, 0, 0]), link(3, X, [0, 0, 0])]);
    for (const bend of [0, 0.01, 0.03, 0.1, 0.3]) {
      for (const tug of [-0.004, -0.001, 0.001, 0.004]) {
        const q = Float64Array.of(0, -bend / 2, bend, 0);
        const before = q.slice();
        const tip = tipAt(spec, q);
        const solver = solverOf(spec);
        solver.solve(Float64Array.of((tip[0] as number) + tug, 0, tip[2] as number), q.slice(), q);
        const turned = Math.max(...q.map((angle, j) => Math.abs(angle - (before[j] as number))));
        expect(turned).toBeLessThan(Math.max(20 * (Math.abs(tug) / 0.6), 0.03) + 0.1 * Math.sqrt(Math.abs(tug) / 0.6));
      }
    }
  });
});
