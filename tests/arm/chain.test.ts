import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { chain } from '../../src/arm/chain.ts';
import { leversM, reachM } from '../../src/arm/extent.ts';
import type { Vec3 } from '../../src/arm/spec.ts';
import { tipMotion } from '../../src/arm/tip-motion.ts';
import { angles, anyArm, arm, DEG, distance, link, planar, tipAt, X, Y, Z } from './arms.ts';

const expectClose = (actual: ArrayLike<number>, expected: readonly number[], digits = 12): void => {
  expect(actual).toHaveLength(expected.length);
  for (const [k, value] of expected.entries()) expect(actual[k], `entry ${k}`).toBeCloseTo(value, digits);
};

describe('a chain of links', () => {
  it('turns right-handed about x forward, y left and z up', () => {
    // By hand: about z forward goes left; about y up goes forward; about x left goes up.
    for (const [axis, to, turned] of [
      [Z, X, Y],
      [Y, Z, X],
      [X, Y, Z],
    ] as const) {
      expectClose(tipAt(arm([link(0, axis, to)]), [90 * DEG]), [...turned]);
    }
  });

  it('adds the turns of its joints: the tip of a planar arm is l1 c1 + l2 c12, l1 s1 + l2 s12', () => {
    const tip = tipAt(planar([0.4, 0.3]), [0.5, 0.9]);
    expectClose(tip, [0.4 * Math.cos(0.5) + 0.3 * Math.cos(1.4), 0, 0.4 * Math.sin(0.5) + 0.3 * Math.sin(1.4)]);
  });

  it('stands at its height, and a base tilted about x, then about y, carries it along', () => {
    const straight = [link(0, Z, [0, 0, 0.5])];
    expectClose(tipAt(arm(straight, { heightM: 0.12 }), [1]), [0, 0, 0.62]);
    // By hand: from the ceiling it points down; tilted 90 degrees about x, up becomes right (-y); then about y that stays.
    expectClose(tipAt(arm(straight, { heightM: 3, tiltRad: [Math.PI, 0] }), [1]), [0, 0, 2.5]);
    expectClose(tipAt(arm(straight, { heightM: 3, tiltRad: [Math.PI / 2, 0] }), [1]), [0, -0.5, 3]);
    expectClose(tipAt(arm(straight, { heightM: 3, tiltRad: [Math.PI / 2, Math.PI / 2] }), [1]), [0, -0.5, 3]);
    expectClose(tipAt(arm(straight, { heightM: 3, tiltRad: [0, Math.PI / 2] }), [1]), [0.5, 0, 3]);
  });

  it('takes its angles by the profile’s joint, in whatever order, and leaves out joints without a link', () => {
    const mixed = arm([link(2, Z, [0, 0, 0.1]), link(0, [0, -1, 0], [0.3, 0, 0])]);
    expectClose(tipAt(mixed, [30 * DEG, 999, 90 * DEG]), [0, 0.3 * Math.cos(30 * DEG), 0.1 + 0.3 * Math.sin(30 * DEG)]);
  });

  it('turns alike about an axis that is written as a direction', () => {
    // A hair beside z: the general rotation against the one about z.
    const near: Vec3 = [1e-9, 0, 1];
    expectClose(
      tipAt(arm([link(0, near, [0.3, 0.1, 0.2])]), [0.7]),
      tipAt(arm([link(0, Z, [0.3, 0.1, 0.2])]), [0.7]),
      8,
    );
  });

  it('refuses an axis that is no unit vector', () => {
    expect(() => chain(arm([link(0, [0, 0, 2], X)]))).toThrow(RangeError);
  });

  it('keeps its links’ lengths and its frames square, for any arm', () => {
    fc.assert(
      fc.property(anyArm, angles(8, 10), (spec, pose) => {
        const poser = chain(spec);
        poser.pose(pose);
        for (const [i, { toM }] of spec.links.entries()) {
          const ends = [3 * i, 3 * i + 3].map((k) => poser.at.subarray(k, k + 3)) as [Float64Array, Float64Array];
          expect(distance(...ends)).toBeCloseTo(Math.hypot(...toM), 9);
          for (let r = 0; r < 3; r++) {
            for (let s = 0; s < 3; s++) {
              const product = [0, 1, 2].reduce(
                (sum, k) => sum + (poser.turn[9 * i + 3 * r + k] as number) * (poser.turn[9 * i + 3 * s + k] as number),
                0,
              );
              expect(product).toBeCloseTo(r === s ? 1 : 0, 9);
            }
          }
        }
      }),
    );
  });
});

describe('the geometric Jacobian', () => {
  // A central difference of h is good to h^2 = 1e-10 times the third derivative, which is at most the reach of some metres.
  const H = 1e-5;

  it('is the finite difference of the tip, for any arm', () => {
    fc.assert(
      fc.property(anyArm, angles(8, 3), (spec, pose) => {
        const n = spec.links.length;
        const poser = chain(spec);
        const jacobian = new Float64Array(3 * n);
        poser.pose(pose);
        poser.jacobian(poser.at, 3 * n, n - 1, jacobian);
        for (let j = 0; j < n; j++) {
          const at = (by: number): number[] =>
            tipAt(
              spec,
              pose.map((angle, k) => (k === j ? angle + by : angle)),
            );
          const [ahead, behind] = [at(H), at(-H)];
          const slope = ahead.map((value, k) => (value - (behind[k] as number)) / (2 * H));
          expectClose(jacobian.subarray(3 * j, 3 * j + 3), slope, 7);
        }
      }),
    );
  });

  it('is nothing for the joints beyond the point’s link', () => {
    const poser = chain(planar([1, 1, 1]));
    poser.pose(Float64Array.of(0.1, 0.2, 0.3));
    const jacobian = new Float64Array(9).fill(7);
    poser.jacobian(poser.at, 3, 0, jacobian);
    expect([...jacobian.subarray(3)]).toEqual([0, 0, 0, 0, 0, 0]);
  });

  it('times the joints’ speeds is the velocity of every link end, for any arm', () => {
    fc.assert(
      fc.property(anyArm, angles(8, 3), angles(8, 5), (spec, pose, speeds) => {
        const poser = chain(spec);
        const n = poser.links;
        poser.pose(pose);
        const velocities = new Float64Array(3 * (n + 1));
        const jacobian = new Float64Array(3 * n);
        poser.velocities(speeds, velocities);
        for (let end = 1; end <= n; end++) {
          poser.jacobian(poser.at, 3 * end, end - 1, jacobian);
          const sum = [0, 1, 2].map((k) =>
            speeds.subarray(0, n).reduce((total, speed, i) => total + speed * (jacobian[3 * i + k] as number), 0),
          );
          expectClose(velocities.subarray(3 * end, 3 * end + 3), sum, 9);
        }
      }),
    );
  });
});

describe('the tip as a function of some joints', () => {
  const H = 1e-4;

  it('bends as the finite difference of its slopes, for any arm', () => {
    fc.assert(
      fc.property(anyArm, angles(8, 3), (spec, pose) => {
        fc.pre(reachM(spec) > 0.1);
        const n = spec.links.length;
        const motion = tipMotion(
          chain(spec),
          spec.links.map((_, j) => j),
        );
        const target = Float64Array.of(0.3, -0.2, 0.5);
        const slopeAt = (at: Float64Array): number[] => {
          motion.look(at, target);
          motion.slopes();
          return Array.from({ length: n }, (_, c) =>
            [0, 1, 2].reduce((sum, k) => sum - (motion.jacobian[3 * c + k] as number) * (motion.error[k] as number), 0),
          );
        };
        slopeAt(pose);
        const bent = new Float64Array(n * n);
        motion.bend(motion.error, bent, n);
        for (let b = 0; b < n; b++) {
          const shifted = (by: number): number[] => slopeAt(pose.map((angle, k) => (k === b ? angle + by : angle)));
          const [ahead, behind] = [shifted(H), shifted(-H)];
          for (let c = b; c < n; c++) {
            const slope = ((ahead[c] as number) - (behind[c] as number)) / (2 * H);
            expect(bent[c * n + b]).toBeCloseTo(slope, 4);
          }
        }
      }),
    );
  });

  it('has the pitch of its last link, and its slope', () => {
    const motion = tipMotion(chain(arm([link(0, Z, [0, 0, 0.1]), link(1, Y, [0, 0, 0.3])])), [0, 1]);
    motion.look(Float64Array.of(0.4, 60 * DEG), new Float64Array(3));
    motion.pitch.look();
    // By hand: leaning 60 degrees from the vertical it looks up by 30, and falls as it leans on; turning does not matter.
    expect((motion.pitch.rad[0] as number) / DEG).toBeCloseTo(30, 9);
    expectClose(motion.pitch.slope, [0, -1]);
  });
});

describe('the pitch of the last link', () => {
  const H = 1e-4;

  it('slopes and bends as its finite differences, for any arm that does not stand upright', () => {
    fc.assert(
      fc.property(anyArm, angles(8, 3), (spec, pose) => {
        const last = spec.links.at(-1)?.toM as Vec3;
        fc.pre(Math.hypot(...last) > 0.01);
        const n = spec.links.length;
        const motion = tipMotion(
          chain(spec),
          spec.links.map((_, j) => j),
        );
        const lookAt = (at: Float64Array): number => {
          motion.look(at, new Float64Array(3));
          motion.pitch.look();
          return motion.pitch.rad[0] as number;
        };
        fc.pre(Math.abs(lookAt(pose)) < 1.3);
        const slope = motion.pitch.slope.slice();
        const bent = new Float64Array(n * n).fill(1);
        motion.pitch.addBend(2, bent, n);
        for (let b = 0; b < n; b++) {
          const shifted = (by: number): Float64Array => pose.map((angle, k) => (k === b ? angle + by : angle));
          const ahead = lookAt(shifted(H));
          const slopesAhead = motion.pitch.slope.slice();
          const behind = lookAt(shifted(-H));
          const slopesBehind = motion.pitch.slope.slice();
          // Near the vertical the third derivative is some tens: h^2 of it is below 1e-6.
          expect(slope[b]).toBeCloseTo((ahead - behind) / (2 * H), 5);
          for (let c = b; c < n; c++) {
            const second = ((slopesAhead[c] as number) - (slopesBehind[c] as number)) / (2 * H);
            expect(bent[c * n + b]).toBeCloseTo(1 + 2 * second, 4);
          }
        }
      }),
    );
  });
});

describe('how far an arm reaches', () => {
  it('is all its links in line', () => {
    expect(reachM(planar([4, 3, 2]))).toBe(9);
  });

  it('never moves a link end further than its levers, for any arm', () => {
    fc.assert(
      fc.property(anyArm, angles(8, 3), (spec, pose) => {
        const poser = chain(spec);
        const n = poser.links;
        const levers = leversM(spec);
        const jacobian = new Float64Array(3 * n);
        poser.pose(pose);
        for (let end = 1; end <= n; end++) {
          poser.jacobian(poser.at, 3 * end, end - 1, jacobian);
          for (let i = 0; i < n; i++) {
            const moves = Math.hypot(...jacobian.subarray(3 * i, 3 * i + 3));
            expect(moves).toBeLessThanOrEqual((levers[i * (n + 1) + end] as number) + 1e-9);
          }
        }
      }),
    );
  });

  it('counts a joint’s own link only where it is beside the axis', () => {
    // By hand: a column that turns does not move its own end; the next link of 0.3 m it moves by 0.3 m a radian.
    const levers = leversM(arm([link(0, Z, [0, 0, 1]), link(1, Y, [0, 0, 0.3])]));
    expect([...levers]).toEqual([0, 0, 0.3, 0, 0, 0.3]);
  });
});
