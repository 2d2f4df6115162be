import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { dynamics } from '../../src/arm/dynamics.ts';
import { effort } from '../../src/arm/effort.ts';
import { loads } from '../../src/arm/load.ts';
import { timeFactor } from '../../src/arm/scale.ts';
import type { ArmSpec } from '../../src/arm/spec.ts';
import { angles, anyArm, arm, bird, DEG, finite, link, planar, Y, Z } from './arms.ts';
import { energyOf, swing } from './swing.ts';

function torqueOf(spec: ArmSpec, q: Float64Array, qd: Float64Array, qdd: Float64Array): number[] {
  const out = new Float64Array(q.length);
  dynamics(spec).torqueNm(q, qd, qdd, out);
  return [...out];
}

describe('the torque that moves an arm', () => {
  it('is the closed form of the planar two-link arm', () => {
    // K. M. Lynch, F. C. Park, Modern Robotics, 2017, eq. 8.9, masses at the links' ends.
    const [m1, m2, L1, L2, g] = [1.5, 0.7, 0.3, 0.2, 9.80665];
    const spec = planar(
      [L1, L2],
      [
        { massKg: m1, centreM: [L1, 0, 0] },
        { massKg: m2, centreM: [L2, 0, 0] },
      ],
    );
    const two = dynamics(spec, { inertia: ['point', 'point'] });
    const [q1, q2, u1, u2, a1, a2] = [0.4, -1.1, 2, -3, 5, 7];
    const c2 = Math.cos(q2);
    const s2 = Math.sin(q2);
    const m12 = m2 * (L1 * L2 * c2 + L2 * L2);
    const expected = [
      (m1 * L1 * L1 + m2 * (L1 * L1 + 2 * L1 * L2 * c2 + L2 * L2)) * a1 +
        m12 * a2 -
        m2 * L1 * L2 * s2 * (2 * u1 * u2 + u2 * u2) +
        (m1 + m2) * L1 * g * Math.cos(q1) +
        m2 * g * L2 * Math.cos(q1 + q2),
      m12 * a1 + m2 * L2 * L2 * a2 + m2 * L1 * L2 * s2 * u1 * u1 + m2 * g * L2 * Math.cos(q1 + q2),
    ];
    const out = new Float64Array(2);
    two.torqueNm(Float64Array.of(q1, q2), Float64Array.of(u1, u2), Float64Array.of(a1, a2), out);
    expect(out[0]).toBeCloseTo(expected[0] as number, 12);
    expect(out[1]).toBeCloseTo(expected[1] as number, 12);
  });

  it('of a rod about its end is m L^2 / 3 times the acceleration', () => {
    // Slender rod: m L^2 / 12 about its centre, plus m (L/2)^2. By hand: 0.9 * 0.4^2 / 3 = 0.048.
    const rod = arm([link(0, Z, [0.4, 0, 0], { massKg: 0.9 })]);
    expect(torqueOf(rod, Float64Array.of(0), Float64Array.of(0), Float64Array.of(1))[0]).toBeCloseTo(0.048, 12);
  });

  it('adds the drag against the motion', () => {
    const one = arm([link(0, Z, [0.4, 0, 0], { dragNm: 0.02 })]);
    for (const [speed, torque] of [
      [3, 0.02],
      [-3, -0.02],
      [0, 0],
    ] as const)
      expect(torqueOf(one, Float64Array.of(0), Float64Array.of(speed), Float64Array.of(0))[0]).toBeCloseTo(torque, 15);
  });

  it('is the static load at rest, for any arm', () => {
    fc.assert(
      fc.property(anyArm, angles(8, 3), (spec, pose) => {
        const n = spec.links.length;
        const q = pose.slice(0, n);
        const still = new Float64Array(n);
        const held = new Float64Array(n);
        loads(spec, n).torqueNm(q, held);
        const moved = torqueOf(spec, q, still, still);
        for (let j = 0; j < n; j++) expect(moved[j]).toBeCloseTo(held[j] as number, 9);
      }),
    );
  });

  it('has a symmetric mass matrix that no motion makes negative, for any arm', () => {
    fc.assert(
      fc.property(anyArm, angles(8, 3), angles(8, 5), (spec, pose, accels) => {
        const n = spec.links.length;
        const { inertialNm } = dynamics(spec);
        const rows = Array.from({ length: n }, (_, c) => {
          const out = new Float64Array(n);
          inertialNm(
            pose.slice(0, n),
            Float64Array.from({ length: n }, (_value, j) => (j === c ? 1 : 0)),
            out,
          );
          return out;
        });
        for (let r = 0; r < n; r++)
          for (let c = 0; c < r; c++) expect(rows[r]?.[c]).toBeCloseTo(rows[c]?.[r] as number, 9);
        const torque = new Float64Array(n);
        inertialNm(pose.slice(0, n), accels.slice(0, n), torque);
        const work = torque.reduce((sum, value, j) => sum + value * (accels[j] as number), 0);
        expect(work).toBeGreaterThan(-1e-9);
      }),
    );
  });

  it('grows with the square of the pace, the weight apart, for any arm', () => {
    // J. M. Hollerbach, J. Dyn. Sys. Meas. Control 106 (1984) 102-106 (from memory): a path run k times as fast has k times
    // the speeds and k^2 times the accelerations, and takes g + k^2 (torque - g).
    fc.assert(
      fc.property(anyArm, angles(8, 3), angles(8, 2), angles(8, 4), finite(0.2, 3), (spec, pose, speeds, accels, k) => {
        const n = spec.links.length;
        const still = new Float64Array(n);
        const at = (times: number): number[] =>
          torqueOf(
            spec,
            pose.slice(0, n),
            speeds.slice(0, n).map((v) => times * v),
            accels.slice(0, n).map((a) => times * times * a),
          );
        const weight = torqueOf(spec, pose.slice(0, n), still, still);
        const once = at(1);
        for (const [j, torque] of at(k).entries()) {
          const g = weight[j] as number;
          expect(torque).toBeCloseTo(g + k * k * ((once[j] as number) - g), 8);
        }
      }),
    );
  });

  it('keeps the energy of an arm that swings free, spring and all', () => {
    const swinging: ArmSpec = {
      ...bird(),
      links: bird().links.map((one, i) =>
        i === 1 ? { ...one, spring: { nPerM: 60, freeM: 0.05, fromM: [0.1, 0, 0.04], toM: [0.05, 0, 0.1] } } : one,
      ),
      payload: { massKg: 0.05, atM: [0.02, 0, 0.02] },
    };
    const state = { q: Float64Array.of(0.2, 0.7, -0.4, 0.5, 0.3), v: Float64Array.of(1, -0.5, 0.4, 0.3, 2) };
    const before = energyOf(swinging, state.q, state.v);
    // A quarter of a second in steps of a quarter millisecond: Runge and Kutta's error goes with the fourth power of it.
    swing(swinging, state, 0.25e-3, 1000);
    expect(energyOf(swinging, state.q, state.v)).toBeCloseTo(before, 6);
    expect(Math.abs((state.q[1] as number) - 0.7)).toBeGreaterThan(0.1);
  });
});

describe('a pendulum', () => {
  const period = (lengthM: number, amplitude: number): number => {
    const bob = arm([link(0, Y, [0, 0, -lengthM], { massKg: 1, centreM: [0, 0, -lengthM] })]);
    const state = { q: Float64Array.of(amplitude), v: Float64Array.of(0) };
    const dt = 1e-3;
    for (let k = 1; ; k++) {
      const before = state.q[0] as number;
      swing(bob, state, dt, 1, ['point']);
      const now = state.q[0] as number;
      // A quarter of a swing ends where it crosses the vertical.
      if (now <= 0) return 4 * dt * (k - 1 + before / (before - now));
    }
  };

  it('swings in 2 pi sqrt(L / g), and by A^2 / 16 longer at amplitude A', () => {
    // Textbook formula with g = 9.80665; periods from memory, recomputed: 0.634482 s at 0.1 m, 1.418746 s at 0.5 m.
    for (const [lengthM, seconds] of [
      [0.1, 0.634482],
      [0.5, 1.418746],
    ] as const)
      expect(period(lengthM, 0.05) / seconds).toBeCloseTo(1 + 0.05 ** 2 / 16, 5);
  });

  it('of four times the length swings half as fast: the time factor of a scale is its root', () => {
    // Froude's similitude: times go with the root of lengths (Froude scaling table, scipedia "Froude similitude").
    expect(timeFactor(4)).toBe(2);
    expect(period(0.4, 0.3) / period(0.1, 0.3)).toBeCloseTo(timeFactor(4), 5);
    expect(() => timeFactor(0)).toThrow(RangeError);
  });
});

describe('the share of a wished acceleration that the motors can give', () => {
  const motor = { stallNm: 4, use: 0.5, holdUse: 0.3, stallA: null };
  // By hand: 1 kg at 0.2 m: weight 1.96133 N m, inertia 0.04 kg m^2, 2 N m to use.
  const lifter = planar([0.2], [{ massKg: 1, centreM: [0.2, 0, 0], motor }]);
  const share = (spec: ArmSpec, q: number, accel: number): number => {
    const out = new Float64Array(1);
    effort(spec, 1).share(Float64Array.of(q), Float64Array.of(0), Float64Array.of(accel), out);
    return out[0] as number;
  };
  // The link's own mass counts as a rod as well: 1 * 0.2^2 / 12 more.
  const inertia = 0.04 + 0.04 / 12;

  it('is all of it where they can', () => {
    expect(share(lifter, 90 * DEG, 40)).toBe(1);
    expect(share(lifter, 0, -40)).toBe(1);
  });

  it('is what is left over the weight', () => {
    expect(share(lifter, 0, 10)).toBeCloseTo((2 - 1.96133) / (inertia * 10), 9);
    expect(share(lifter, 90 * DEG, 100)).toBeCloseTo(2 / (inertia * 100), 9);
  });

  it('does not ask a joint that is over its limit at rest', () => {
    const weak = planar([0.2], [{ massKg: 2, centreM: [0.2, 0, 0], motor }]);
    expect(share(weak, 0, 10)).toBe(1);
  });
});
