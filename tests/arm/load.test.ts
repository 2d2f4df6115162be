import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { loads } from '../../src/arm/load.ts';
import type { ArmSpec } from '../../src/arm/spec.ts';
import { angles, anyArm, arm, DEG, link, planar, X, Y, Z } from './arms.ts';
import { energyOf } from './swing.ts';

function torqueOf(spec: ArmSpec, pose: ArrayLike<number>): number[] {
  const out = new Float64Array(pose.length);
  loads(spec, pose.length).torqueNm(Float64Array.from(pose), out);
  return [...out];
}

/** Energy of an arm at rest, joules; g as the 3rd CGPM of 1901 set it. */
const restingJ = (spec: ArmSpec, pose: Float64Array): number => energyOf(spec, pose, new Float64Array(pose.length));

/** A horizontal bar with a point mass at its end. */
const bar = (massKg: number, lengthM: number): ArmSpec => planar([lengthM], [{ massKg, centreM: [lengthM, 0, 0] }]);

describe('the torque that holds an arm still', () => {
  it('is 0.980665 newton metres for 1 kg at 10 cm, which is 10 kgf cm', () => {
    // g = 980.665 cm/s^2: resolution 2 of the 3rd CGPM, 1901, Comptes rendus p. 70 (bipm.org); 1 kgf cm = 0.0980665 N m.
    // The bar turns from x to z, so its motor lifts with a positive torque.
    expect(torqueOf(bar(1, 0.1), [0])[0]).toBeCloseTo(0.980665, 12);
    for (const [kgfCm, nm] of [
      [1.8, 0.1765197],
      [2.5, 0.24516625],
      [20, 1.96133],
    ] as const) {
      expect(torqueOf(bar(kgfCm, 0.01), [0])[0]).toBeCloseTo(nm, 12);
    }
  });

  it('is m g L cos of the angle above the horizontal, and nothing upright', () => {
    for (const deg of [-90, -30, 0, 45, 90, 135]) {
      expect(torqueOf(bar(2, 0.5), [deg * DEG])[0]).toBeCloseTo(2 * 9.80665 * 0.5 * Math.cos(deg * DEG), 12);
    }
  });

  it('has the sign of turning about the axis: a mass ahead of a joint about y falls with it, so holding it is negative', () => {
    const ahead = arm([link(0, Y, [0.2, 0, 0], { massKg: 1, centreM: [0.2, 0, 0] })]);
    // By hand: 1 * 9.80665 * 0.2.
    expect(torqueOf(ahead, [0])[0]).toBeCloseTo(-1.96133, 12);
  });

  it('is the closed form of the planar two-link arm', () => {
    // K. M. Lynch, F. C. Park, Modern Robotics, 2017, eq. 8.9, masses at the links' ends: g1 = (m1 + m2) L1 g cos q1 + m2 g L2
    // cos(q1 + q2), g2 = m2 g L2 cos(q1 + q2).
    const two = planar(
      [0.3, 0.2],
      [
        { massKg: 1.5, centreM: [0.3, 0, 0] },
        { massKg: 0.7, centreM: [0.2, 0, 0] },
      ],
    );
    const [q1, q2] = [0.4, -1.1];
    const g2 = 0.7 * 9.80665 * 0.2 * Math.cos(q1 + q2);
    const torque = torqueOf(two, [q1, q2]);
    expect(torque[0]).toBeCloseTo(2.2 * 0.3 * 9.80665 * Math.cos(q1) + g2, 12);
    expect(torque[1]).toBeCloseTo(g2, 12);
  });

  it('counts the payload from the tip and the counterweight from the axis', () => {
    // By hand, about the axis: 0.4 kg at 0.15, 0.1 kg at 0.3 + 0.05, minus 0.5 kg at 0.12 on the other side.
    const one = arm(
      [link(0, [0, -1, 0], [0.3, 0, 0], { massKg: 0.4, counterweight: { massKg: 0.5, atM: [-0.12, 0, 0] } })],
      {},
      { massKg: 0.1, atM: [0.05, 0, 0] },
    );
    expect(torqueOf(one, [0])[0]).toBeCloseTo(9.80665 * (0.06 + 0.035 - 0.06), 12);
  });

  it('hangs from a ceiling with the other sign', () => {
    const standing = arm([link(0, Y, [0, 0, 0.4], { massKg: 1 })]);
    const hung = arm([link(0, Y, [0, 0, 0.4], { massKg: 1 })], { tiltRad: [Math.PI, 0], heightM: 3 });
    // Turned about x, y points the other way, so the same turn takes the mass to the other side: by hand, standing the mass
    // goes forward and falls on; hung it goes forward too and falls back.
    const standingNm = torqueOf(standing, [0.3])[0] as number;
    expect(standingNm).toBeLessThan(0);
    expect(torqueOf(hung, [0.3])[0]).toBeCloseTo(-standingNm, 12);
  });

  it('is the slope of the potential energy, for any arm with springs and cables', () => {
    // A derivative by central differences is good to about h^2 = 1e-10 of the third derivative, and 1e-16 / h of the energy.
    const H = 1e-5;
    const sprung = anyArm.map(
      (spec): ArmSpec => ({
        ...spec,
        links: spec.links.map((one, i) => ({
          ...one,
          spring: { nPerM: 300, freeM: 0.05, fromM: [0.2, 0.1 * i, 0.1], toM: [-0.1, 0.2, 0.15] },
          cable: { nmPerRad: 0.2, freeRad: 0.3 },
        })),
      }),
    );
    fc.assert(
      fc.property(sprung, angles(8, 3), (spec, pose) => {
        const n = spec.links.length;
        const torque = torqueOf(spec, pose.subarray(0, n));
        for (let j = 0; j < n; j++) {
          const shifted = (by: number): number => {
            const at = pose.slice(0, n);
            at[j] = (at[j] as number) + by;
            return restingJ(spec, at);
          };
          const slope = (shifted(H) - shifted(-H)) / (2 * H);
          expect(torque[j]).toBeCloseTo(slope, 3);
        }
      }),
    );
  });
});

describe('a spring across a joint', () => {
  const sprung = (freeM: number): ArmSpec =>
    arm([
      link(0, Z, [0, 0, 0.06]),
      link(1, Y, [0, 0, 0.4], { spring: { nPerM: 800, freeM, fromM: [0, 0, 0.15], toM: [0, 0, 0.1] } }),
    ]);

  it('pulls along its line, from where the link before ends', () => {
    // By hand: the axis is at 0.06, so the ends are 0.09 above it and 0.1 along the link. Turned by 90 degrees the spring is
    // sqrt(0.09^2 + 0.1^2) = 0.13454 long, its lever 0.09 * 0.1 / 0.13454 = 0.066896; it pulls the link back up, and so
    // the motor has to push on: 800 (0.13454 - 0.05) 0.066896.
    const length = Math.hypot(0.09, 0.1);
    expect(torqueOf(sprung(0.05), [0, 90 * DEG])[1]).toBeCloseTo((800 * (length - 0.05) * 0.09 * 0.1) / length, 12);
  });

  it('hangs slack when it is shorter than its free length', () => {
    expect(torqueOf(sprung(0.2), [0, 90 * DEG])[1]).toBe(0);
  });

  it('with no free length holds a mass at every angle, when k = m g L / (a b)', () => {
    // T. Laliberte, C. M. Gosselin, M. Jean, Mech. Mach. Theory 34 (1999): static balancing by springs (from memory, and
    // derived: the sum of both energies does not depend on the angle). a = 0.1 above the axis, b = 0.2 along the link.
    const [m, L, a, b] = [1.2, 0.5, 0.1, 0.2];
    const k = (m * 9.80665 * L) / (a * b);
    const held = arm([
      link(0, X, [0, 0, L], {
        massKg: m,
        centreM: [0, 0, L],
        spring: { nPerM: k, freeM: 0, fromM: [0, 0, a], toM: [0, 0, b] },
      }),
    ]);
    for (const deg of [-170, -90, -20, 0, 35, 90, 120]) expect(torqueOf(held, [deg * DEG])[0]).toBeCloseTo(0, 12);
  });
});

describe('the share of what a motor may give', () => {
  const spec = planar(
    [0.2],
    [{ massKg: 1, centreM: [0.2, 0, 0], dragNm: 0.1, motor: { stallNm: 10, use: 0.5, holdUse: 0.3, stallA: null } }],
  );
  const two: ArmSpec = { ...spec, links: [...spec.links, link(2, Y, [0.1, 0, 0])] };
  const shares = (holding: boolean): number[] => {
    const out = new Float64Array(3);
    loads(two, 3).shares(Float64Array.of(0, 0, 0), holding, out);
    return [...out];
  };

  it('is against its holding share at rest, and with the drag against its use while moving', () => {
    // By hand: 1.96133 / 3; (1.96133 + 0.1) / 5.
    expect(shares(true)[0]).toBeCloseTo(0.6537767, 7);
    expect(shares(false)[0]).toBeCloseTo(0.412266, 7);
  });

  it('is not a number where no motor or no link is known, and so never over a limit', () => {
    expect(shares(true).slice(1)).toEqual([Number.NaN, Number.NaN]);
    const worst = new Float64Array(3);
    loads(two, 3).worst(Float64Array.of(0, 0, 0), worst);
    expect(worst[0]).toBeCloseTo(0.6537767, 7);
    expect((worst[1] as number) > 1).toBe(false);
  });
});
